#include "nights/night.h"

#include <algorithm>
#include <stdexcept>

#include "engine/run.h"
#include "formats/recording.h"
#include "rehearsal/invented_run.h"

namespace lastscan::nights {

Night::Night(const rehearsal::Scenario& scenario, std::uint64_t seed, bool until_enough)
    : scenario_(scenario) {
  rehearsal::InventedRun run(scenario.sample, seed);
  engine::Run engine(engine::DefaultSettings());
  std::optional<std::int64_t> booking_end;
  for (std::uint64_t scans : scenario.looks) {
    formats::Recording recording = run.AdvanceTo(scans);
    v1::Snapshot& snapshot = recording.snapshot;
    *snapshot.mutable_goal() = scenario.goal;
    if (scenario.booking_hours) {
      if (!booking_end) {
        const double begun = static_cast<double>(snapshot.recorded_at().seconds()) -
                             static_cast<double>(scans) * scenario.sample.seconds_per_scan;
        booking_end = static_cast<std::int64_t>(begun + *scenario.booking_hours * 3600);
      }
      snapshot.mutable_booking_end()->set_seconds(*booking_end);
    }
    advice_.push_back(engine.Admit(snapshot, formats::AsFrame(recording.samples)));
    if (until_enough && advice_.back().verdict() == v1::ENOUGH) break;
  }
}

std::vector<v1::Verdict> Night::verdicts() const {
  std::vector<v1::Verdict> order;
  for (const v1::Advice& advice : advice_) {
    if (order.empty() || order.back() != advice.verdict()) order.push_back(advice.verdict());
  }
  return order;
}

std::optional<std::uint64_t> Night::FirstScanOf(v1::Verdict verdict) const {
  for (const v1::Advice& advice : advice_) {
    if (advice.verdict() == verdict) return advice.scans_done();
  }
  return std::nullopt;
}

std::optional<std::uint64_t> Night::FirstScanOf(v1::FindingKind kind) const {
  for (const v1::Advice& advice : advice_) {
    for (const v1::Finding& finding : advice.findings()) {
      if (finding.kind() == kind) return advice.scans_done();
    }
  }
  return std::nullopt;
}

const v1::Advice& Night::AtScan(std::uint64_t scans) const {
  const auto at = std::find_if(advice_.begin(), advice_.end(), [&](const v1::Advice& advice) {
    return advice.scans_done() >= scans;
  });
  if (at == advice_.end()) throw std::out_of_range("the night is over before that scan");
  return *at;
}

double Night::TrueSignalToNoise(double scans) const {
  return rehearsal::InventedRun(scenario_.sample, 0).TrueSignalToNoise(0, scans);
}

double Night::TrueScansNeeded() const {
  const double one = TrueSignalToNoise(1);
  return scenario_.goal.target() * scenario_.goal.target() / (one * one);
}

}  // namespace lastscan::nights
