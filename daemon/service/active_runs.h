// The runs in memory: the most recently used ones, the others in the ledger.
#pragma once

#include <cstddef>
#include <list>
#include <string>
#include <unordered_map>

#include "engine/run.h"
#include "lastscan/v1/ledger.pb.h"
#include "lastscan/v1/settings.pb.h"
#include "ledger/ledger.h"

namespace lastscan::service {

struct ActiveRun {
  std::string name;
  engine::Run run;
  v1::RunRecord record;  // empty before the first snapshot
};

// What is in memory is always what the ledger holds: whoever changes a run and
// cannot commit the change drops the run, and the next Find brings back the
// state that was committed last.
class ActiveRuns {
 public:
  // Keeps at most `most` runs in memory. `book` outlives this.
  // Throws engine::Refusal if a value in `settings` is impossible.
  ActiveRuns(v1::EngineSettings settings, const ledger::Ledger& book, std::size_t most);

  // The run, from memory, from the ledger or new. Valid until the next call.
  // Throws engine::Refusal when its state is no longer kept or cannot be read,
  // ledger::LedgerError.
  ActiveRun& Find(const std::string& name);

  // Forgets what memory holds of the run, if anything.
  void Drop(const std::string& name);

  std::size_t size() const { return runs_.size(); }

 private:
  ActiveRun Load(const std::string& name) const;

  v1::EngineSettings settings_;
  const ledger::Ledger& book_;
  std::size_t most_;
  std::list<ActiveRun> runs_;  // latest used first
  std::unordered_map<std::string, std::list<ActiveRun>::iterator> places_;
};

}  // namespace lastscan::service
