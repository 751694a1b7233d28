// Answers requests: everything the daemon does but sockets and waiting.
//
// A snapshot goes  known already? -> engine -> ledger (commit) -> broadcast, and
// is acknowledged last. Whatever fails on the way, memory and ledger stay at
// the state committed before.
#pragma once

#include <functional>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "lastscan/v1/service.pb.h"
#include "lastscan/v1/settings.pb.h"
#include "ledger/ledger.h"
#include "service/active_runs.h"
#include "service/silence.h"

namespace lastscan::service {

// The daemon's two clocks, in seconds: the wall's since 1970, and one that never
// jumps, for waiting.
struct Clocks {
  std::function<double()> wall;
  std::function<double()> steady;
};
Clocks SystemClocks();

class Requests {
 public:
  using Broadcast = std::function<void(const v1::Advice&)>;

  // Takes up the runs that had not ended when the daemon stopped. `book` outlives
  // this. Throws engine::Refusal for impossible settings, ledger::LedgerError.
  Requests(const v1::Settings& settings, ledger::Ledger& book, Clocks clocks, Broadcast broadcast);

  // Answers one request given as its frames, without envelope. Never throws for
  // anything a sender can do: garbage is refused with a reason.
  v1::Reply Answer(const std::vector<std::string_view>& frames);

  // Tells of runs that have gone silent: finding, record, broadcast, log.
  void CheckSilence();

  // Seconds until CheckSilence will have something to do; nothing if never.
  std::optional<double> SecondsToSilence() const;

  // Runs taken up at the start.
  std::size_t resumed() const { return resumed_; }

 private:
  v1::Reply Dispatch(const std::vector<std::string_view>& frames);
  v1::Reply TakeSnapshot(const v1::Snapshot& sent, std::string_view samples);
  v1::Reply Commit(const v1::Snapshot& snapshot, std::string_view samples,
                   const std::string& fingerprint);
  v1::Reply List(const v1::ListRuns& question) const;
  v1::Reply Show(const v1::ShowRun& question) const;
  v1::Reply Read(const v1::ReadLedger& question) const;
  void Watch(const v1::Snapshot& snapshot, const v1::Advice& advice);
  void TellSilence(const Silence& silence);
  void Log(const v1::Advice& advice) const;

  v1::ServiceSettings settings_;
  ledger::Ledger& book_;
  Clocks clocks_;
  Broadcast broadcast_;
  ActiveRuns runs_;
  SilenceWatch silence_;
  std::size_t resumed_ = 0;
  double states_dropped_at_ = 0;
};

}  // namespace lastscan::service
