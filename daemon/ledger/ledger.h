// The ledger: what every run was given, promised and achieved, for ever, in one
// SQLite file. It promises:
//
//   * One transaction a snapshot: the run's state, the advice and the record are
//     all there or none of them is. When a call returns, the data are on disk
//     (write-ahead log, full synchronisation).
//   * A ledger of a newer version, another program's database or a file that is no
//     database is refused before anything is written to it.
//   * One process at a time: a second one on the same ledger is refused.
//
// It knows messages, not the engine: the state of a run is bytes to it.
#pragma once

#include <cstddef>
#include <cstdint>
#include <memory>
#include <optional>
#include <stdexcept>
#include <string>
#include <string_view>
#include <vector>

#include "lastscan/v1/advice.pb.h"
#include "lastscan/v1/ledger.pb.h"
#include "lastscan/v1/service.pb.h"

namespace lastscan::ledger {

// The ledger cannot be opened, read or written. what() is one line: what, where,
// what to do.
class LedgerError : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

// The version of the tables this program writes and reads.
inline constexpr std::uint32_t kLedgerVersion = 1;

// What one accepted snapshot adds. The pointers outlive the call.
struct SnapshotEntry {
  const v1::RunRecord* record = nullptr;  // the run's record, this snapshot included
  const v1::Advice* advice = nullptr;     // what the snapshot led to
  std::string_view state;                 // the run's state after it
  std::string_view fingerprint;           // of the snapshot, see fingerprint.h
  double arrived_at = 0;                  // Unix seconds by the daemon's clock
};

// A run that has had no final snapshot, as it is needed after a restart.
struct OpenRun {
  v1::RunRecord record;
  v1::Advice advice;                // the latest
  std::vector<double> intervals_s;  // between its latest snapshots, oldest first
};

class Ledger {
 public:
  // Opens the ledger at `path`, making it and its folder (owner only) if need
  // be. ":memory:" keeps everything in memory, for tests. Throws LedgerError.
  explicit Ledger(const std::string& path);
  ~Ledger();
  Ledger(const Ledger&) = delete;
  Ledger& operator=(const Ledger&) = delete;

  // All calls throw LedgerError when the file cannot be read or written; a call
  // that writes has then changed nothing.

  // Adds one snapshot with everything it led to.
  // REQUIRES: the ledger holds no snapshot of the run with as many scans.
  void AddSnapshot(const SnapshotEntry& entry);

  // Adds an advice that no snapshot led to (a run gone silent): the record and
  // the latest advice change, the state and the snapshots stay.
  // REQUIRES: the ledger holds the run.
  void AddAdvice(const v1::RunRecord& record, const v1::Advice& advice);

  // The advice that this very snapshot was given, if the ledger holds it.
  std::optional<v1::Advice> AdviceGiven(const std::string& run, std::uint64_t scans_done,
                                        std::string_view fingerprint) const;

  std::optional<v1::RunRecord> Record(const std::string& run) const;
  std::optional<v1::Advice> LatestAdvice(const std::string& run) const;

  // The run's state after its latest snapshot; nothing once it was dropped.
  std::optional<std::string> State(const std::string& run) const;

  // Up to `most` advices of a run in order of scans, evenly thinned, always with
  // the first and the last one. The latest advice closes them if no snapshot led to it.
  std::vector<v1::Advice> History(const std::string& run, std::size_t most) const;

  // The latest advice of each run, newest arrival first, at most `most`; with
  // `open_only` of those that have not ended and arrived at `since` or later.
  std::vector<v1::Advice> LatestAdvices(bool open_only, double since, std::size_t most) const;

  // Records that match the filters, newest first.
  std::vector<v1::RunRecord> Records(const v1::ReadLedger& filter) const;

  // Runs that have not ended and arrived at `since` or later, each with at most
  // `most_intervals` intervals.
  std::vector<OpenRun> OpenRuns(double since, std::size_t most_intervals) const;

  // Forgets the states (not the records) of runs whose latest snapshot arrived
  // before `before`. Returns how many.
  int DropStates(double before);

 private:
  class File;
  std::unique_ptr<File> file_;
};

}  // namespace lastscan::ledger
