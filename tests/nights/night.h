// Plays an invented night through the engine, as the daemon would, and answers
// what an operator would ask of it in the morning. See rehearsal/scenarios.h
// for the nights themselves.
#pragma once

#include <cstdint>
#include <functional>
#include <optional>
#include <ostream>
#include <string>
#include <vector>

#include "lastscan/v1/advice.pb.h"
#include "rehearsal/scenarios.h"

namespace lastscan::nights {

class Night {
 public:
  // Plays the whole of `scenario` with this seed; stops early where
  // `until_enough` and the advice says ENOUGH.
  explicit Night(const rehearsal::Scenario& scenario, std::uint64_t seed = 1,
                 bool until_enough = false);

  // The verdicts in the order in which they were given, repeats left out.
  std::vector<v1::Verdict> verdicts() const;

  // Scans done when the verdict was first given; empty when it never was.
  std::optional<std::uint64_t> FirstScanOf(v1::Verdict verdict) const;
  std::optional<std::uint64_t> FirstScanOf(v1::FindingKind finding) const;
  bool Ever(v1::Verdict verdict) const { return FirstScanOf(verdict).has_value(); }
  bool Ever(v1::FindingKind finding) const { return FirstScanOf(finding).has_value(); }

  // All advice, one a snapshot, and the latest.
  const std::vector<v1::Advice>& all() const { return advice_; }
  const v1::Advice& last() const { return advice_.back(); }
  // The advice at the first snapshot of at least `scans`.
  const v1::Advice& AtScan(std::uint64_t scans) const;

  // What is really there: the limiting line's signal-to-noise after `scans`.
  double TrueSignalToNoise(double scans) const;
  // The scan at which it truly reaches the goal's target.
  double TrueScansNeeded() const;

 private:
  rehearsal::Scenario scenario_;
  std::vector<v1::Advice> advice_;
};

}  // namespace lastscan::nights
