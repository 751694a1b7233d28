// Rules of thumb of the trade (common practice, no source) that the engine must
// agree with: four times the scans double the signal-to-noise, and twice the
// concentration needs a quarter of the scans. 5 mg with 64 scans in 4 minutes
// equal 10 mg with 16 scans in 1 minute.
#include <gtest/gtest.h>

#include <cmath>
#include <cstdint>
#include <vector>

#include "engine/forecast/extrapolation.h"
#include "engine/run.h"
#include "rehearsal/invented_run.h"

namespace lastscan::engine {
namespace {

constexpr double kPerScanOf5Mg = 5;       // height over rms of one scan
constexpr double kSecondsPerScan = 3.75;  // 64 scans in 4 minutes
constexpr int kRuns = 24;

TEST(RootOfScans, FourTimesTheScansDoubleTheForecast) {
  EXPECT_DOUBLE_EQ(ReadingLater(7, 1, 16, 64).centre, 14);
  EXPECT_DOUBLE_EQ(ReadingLater(7, 1, 100, 400).centre, 14);
  // The noise to come is that of the scans to come: variance 4 - 1.
  EXPECT_DOUBLE_EQ(ReadingLater(7, 1, 16, 64).deviation, std::sqrt(3));
  // An even chance to read there what is expected there.
  EXPECT_DOUBLE_EQ(ChanceOfReading(14, 7, 1, 16, 64), 0.5);
}

TEST(RootOfScans, TwiceTheConcentrationNeedsAQuarterOfTheScans) {
  EXPECT_DOUBLE_EQ(ScansForTarget(40, 5, 1), 64);
  EXPECT_DOUBLE_EQ(ScansForTarget(40, 10, 1), 16);
}

// Runs of `milligrams`, each judged at `looks`: the advice at every look.
std::vector<std::vector<v1::Advice>> Judged(double milligrams,
                                            const std::vector<std::uint64_t>& looks) {
  rehearsal::InventedSample sample;
  sample.points = 1024;
  sample.spectral_width_hz = 4000;
  sample.broadening_hz = 1;
  sample.scans_planned = 64;
  sample.phase_cycle = 1;
  sample.seconds_per_scan = kSecondsPerScan;
  sample.lines = {{103, 4, kPerScanOf5Mg * milligrams / 5, 0}};
  std::vector<std::vector<v1::Advice>> runs;
  for (int seed = 1; seed <= kRuns; ++seed) {
    rehearsal::InventedRun invented(sample, static_cast<std::uint64_t>(seed));
    Run run(DefaultSettings());
    std::vector<v1::Advice>& judged = runs.emplace_back();
    for (std::uint64_t scans : looks) {
      formats::Recording look = invented.AdvanceTo(scans);
      look.snapshot.mutable_goal()->set_target(40);
      judged.push_back(run.Admit(look.snapshot, formats::AsFrame(look.samples)));
    }
  }
  return runs;
}

double MeanReading(const std::vector<std::vector<v1::Advice>>& runs, std::size_t look) {
  double sum = 0;
  for (const auto& run : runs) sum += run[look].signal_to_noise().estimate();
  return sum / static_cast<double>(runs.size());
}

// One reading errs by 1, and by 1.5 % for the noise of 1,024 points.
double DeviationOfMean(double reading) { return std::hypot(1, 0.015 * reading) / std::sqrt(kRuns); }

TEST(RootOfScans, FourTimesTheScansDoubleTheReading) {
  const auto runs = Judged(5, {4, 8, 16, 32, 64});
  const double after_16 = MeanReading(runs, 2);
  const double after_64 = MeanReading(runs, 4);
  EXPECT_NEAR(after_64, 2 * after_16,
              3 * std::hypot(DeviationOfMean(after_64), 2 * DeviationOfMean(after_16)));
  EXPECT_NEAR(after_64, kPerScanOf5Mg * 8, 3 * DeviationOfMean(after_64));
}

TEST(RootOfScans, FiveMilligramsIn64ScansEqualTenIn16) {
  const auto five = Judged(5, {4, 8, 16, 32, 64});
  const auto ten = Judged(10, {4, 8, 16});
  const double of_five = MeanReading(five, 4);
  const double of_ten = MeanReading(ten, 2);
  EXPECT_NEAR(of_five, of_ten, 3 * std::sqrt(2) * DeviationOfMean(of_five));
}

// Both are foreseen while the runs go on: 64 scans and 4 minutes for the one, 16
// scans and 1 minute for the other, inside the 95 % limits nearly always.
TEST(RootOfScans, TheEngineForeseesScansAndMinutes) {
  struct Case {
    double milligrams;
    std::vector<std::uint64_t> looks;
    double scans;
    double minutes;
  };
  for (const Case& c : std::vector<Case>{{5, {8, 16, 32}, 64, 4}, {10, {2, 4, 8}, 16, 1}}) {
    int covered = 0;
    double log_mean = 0;
    const auto runs = Judged(c.milligrams, c.looks);
    for (const auto& run : runs) {
      const v1::Interval& needed = run.back().scans_needed();
      covered += needed.lower() <= c.scans && c.scans <= needed.upper() ? 1 : 0;
      log_mean += std::log(needed.estimate()) / kRuns;
      // Scans still to come, at the pace of the snapshots.
      const double seconds = static_cast<double>(run.back().finish_at().estimate().seconds() -
                                                 run.back().issued_at().seconds());
      const double scans_done = static_cast<double>(run.back().scans_done());
      EXPECT_NEAR(run.back().seconds_per_scan(), kSecondsPerScan, 0.13);
      const double minutes = (seconds + scans_done * kSecondsPerScan) / 60;
      EXPECT_NEAR(minutes / c.minutes, needed.estimate() / c.scans, 0.25) << c.milligrams << " mg";
    }
    // Halfway a reading of 28 errs by 1: the scans by 7 % a run.
    EXPECT_NEAR(std::exp(log_mean) / c.scans, 1, 3 * 0.08 / std::sqrt(kRuns)) << c.milligrams;
    EXPECT_GE(covered, kRuns - 4) << c.milligrams << " mg";
  }
}

}  // namespace
}  // namespace lastscan::engine
