// The runs in memory: the most recently used ones, the others in the ledger.
#include "service/active_runs.h"

#include <optional>
#include <utility>

#include "engine/refusal.h"

namespace lastscan::service {

ActiveRuns::ActiveRuns(v1::EngineSettings settings, const ledger::Ledger& book, std::size_t most)
    : settings_(std::move(settings)), book_(book), most_(most) {
  engine::Run check(settings_);
}

ActiveRun ActiveRuns::Load(const std::string& name) const {
  const std::optional<v1::RunRecord> record = book_.Record(name);
  if (!record) return {name, engine::Run(settings_), {}};
  const std::optional<std::string> state = book_.State(name);
  if (!state) {
    throw engine::Refusal("run '" + name +
                          "' has rested so long that its data are no longer kept, only its "
                          "record: give the new accumulation a run name of its own");
  }
  try {
    return {name, engine::Run::Load(settings_, *state), *record};
  } catch (const engine::Refusal& refusal) {
    throw engine::Refusal("run '" + name + "' cannot go on from the ledger: " + refusal.what() +
                          "; give the rest of it a run name of its own");
  }
}

ActiveRun& ActiveRuns::Find(const std::string& name) {
  if (const auto found = places_.find(name); found != places_.end()) {
    runs_.splice(runs_.begin(), runs_, found->second);
    return runs_.front();
  }
  runs_.push_front(Load(name));
  places_[name] = runs_.begin();
  if (runs_.size() > most_) {
    places_.erase(runs_.back().name);
    runs_.pop_back();
  }
  return runs_.front();
}

void ActiveRuns::Drop(const std::string& name) {
  const auto found = places_.find(name);
  if (found == places_.end()) return;
  runs_.erase(found->second);
  places_.erase(found);
}

}  // namespace lastscan::service
