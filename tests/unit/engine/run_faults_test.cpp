// Invented faults told by a run, and none told where there is none.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <optional>

#include "unit/engine/limits.h"
#include "unit/engine/run_bench.h"

namespace lastscan::engine {
namespace {

// The scan at which `kind` was first told; empty when it never was.
std::optional<std::uint64_t> ToldAt(const std::vector<v1::Advice>& advice, v1::FindingKind kind) {
  for (const v1::Advice& each : advice) {
    for (const v1::Finding& finding : each.findings()) {
      if (finding.kind() == kind) return each.scans_done();
    }
  }
  return std::nullopt;
}

// The share of a study in which a fault is told after it began, before the end.
// We claim 95 %.
template <typename Spoil>
int Told(int runs, v1::FindingKind kind, Spoil spoil) {
  int told = 0;
  for (int run = 0; run < runs; ++run) {
    rehearsal::InventedSample sample = FourLines(2);
    spoil(sample);
    const auto at = ToldAt(
        Played(Snapshots(sample, Every(32, 32), WindowGoal(60), static_cast<std::uint64_t>(run))),
        kind);
    told += at && *at > 512 ? 1 : 0;
  }
  return told;
}

constexpr int kRuns = 40;

TEST(RunFaults, AnAmplitudeLossOfAFifthIsTold) {
  EXPECT_GE(Told(kRuns, v1::AMPLITUDE_LOSS,
                 [](auto& sample) {
                   sample.amplitude = [](std::uint64_t scan) { return scan > 512 ? 0.8 : 1.0; };
                 }),
            FewestHits(kRuns, 0.95));
}

TEST(RunFaults, AGainThatNobodyStatedIsTold) {
  EXPECT_GE(Told(kRuns, v1::GAIN_CHANGE,
                 [](auto& sample) {
                   sample.gain = [](std::uint64_t scan) { return scan > 512 ? 2.0 : 1.0; };
                 }),
            FewestHits(kRuns, 0.95));
}

TEST(RunFaults, NoiseThatRisesIsTold) {
  EXPECT_GE(Told(kRuns, v1::NOISE_STEP,
                 [](auto& sample) {
                   sample.noise = [](std::uint64_t scan) { return scan > 512 ? 1.5 : 1.0; };
                 }),
            FewestHits(kRuns, 0.95));
}

TEST(RunFaults, ADriftOfTheLinesIsTold) {
  // One line width: the lines no longer add up where they began.
  EXPECT_GE(Told(kRuns, v1::AMPLITUDE_LOSS,
                 [](auto& sample) {
                   sample.drift_hz = [](std::uint64_t scan) {
                     return scan > 512 ? 4 * (static_cast<double>(scan) - 512) / 512 : 0.0;
                   };
                 }),
            FewestHits(kRuns, 0.95));
}

TEST(RunFaults, ASoundRunIsLeftAlone) {
  constexpr int kSound = 150;
  int alarmed = 0;
  for (int run = 0; run < kSound; ++run) {
    rehearsal::InventedSample sample = run % 2 == 0 ? FourLines(1) : OneLine(0.5);
    sample.lock_level = [](std::uint64_t scan) { return 0.85 + 0.05 * static_cast<int>(scan % 3); };
    std::vector<Sent> sent =
        Snapshots(sample, Every(32, 32), WindowGoal(60), static_cast<std::uint64_t>(1000 + run));
    for (Sent& each : sent) *each.snapshot.mutable_noise_window() = ShiftsFrom(93, 95.5);
    const auto advice = Played(sent);
    alarmed += std::any_of(advice.begin(), advice.end(), [](const v1::Advice& each) {
      return std::any_of(each.findings().begin(), each.findings().end(),
                         [](const v1::Finding& f) { return f.severity() != v1::NOTE; });
    });
  }
  EXPECT_LE(alarmed, MostHits(kSound, 0.01));
}

}  // namespace
}  // namespace lastscan::engine
