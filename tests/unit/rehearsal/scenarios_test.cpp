// The named nights must be what their truth says, and runnable.
#include "rehearsal/scenarios.h"

#include <gtest/gtest.h>

#include <cmath>
#include <set>

#include "engine/sensitivity/solvents.h"

namespace lastscan::rehearsal {
namespace {

TEST(Scenarios, AreNamedOnceAndFound) {
  std::set<std::string> names;
  std::set<std::string> runs;
  for (const Scenario& scenario : Scenarios()) {
    EXPECT_TRUE(names.insert(scenario.name).second) << scenario.name;
    EXPECT_TRUE(runs.insert(scenario.sample.run).second) << scenario.sample.run;
    EXPECT_EQ(FindScenario(scenario.name), &scenario);
    EXPECT_FALSE(scenario.story.empty());
    EXPECT_FALSE(scenario.truth.empty());
  }
  EXPECT_GE(names.size(), 10u);
  EXPECT_EQ(FindScenario("no-such-night"), nullptr);
}

TEST(Scenarios, LooksRiseInWholePhaseCyclesAndEveryLineIsInsideTheSpectrum) {
  for (const Scenario& scenario : Scenarios()) {
    const InventedSample& sample = scenario.sample;
    std::uint64_t before = 0;
    for (const std::uint64_t look : scenario.looks) {
      EXPECT_GT(look, before) << scenario.name;
      EXPECT_EQ(look % sample.phase_cycle, 0u) << scenario.name;
      before = look;
    }
    EXPECT_GE(before, sample.scans_planned) << scenario.name;
    const double half = 0.5 * sample.spectral_width_hz / sample.observe_frequency_mhz;
    for (const InventedLine& line : sample.lines) {
      EXPECT_LT(std::abs(line.shift_ppm - sample.centre_shift_ppm), 0.95 * half) << scenario.name;
    }
  }
}

// What the verdicts hang on: whether the limiting line's true reading meets the
// target at the planned end, at the booking's end, or never.
TEST(Scenarios, TruthFitsTheName) {
  const auto reading_at = [](const Scenario& scenario, double scans) {
    return InventedRun(scenario.sample, 1).TrueSignalToNoise(0, scans);
  };
  const auto booked = [](const Scenario& scenario) {
    return *scenario.booking_hours * 3600 / scenario.sample.seconds_per_scan;
  };
  const Scenario& strong = *FindScenario("strong-sample");
  EXPECT_GT(reading_at(strong, 0.25 * static_cast<double>(strong.sample.scans_planned)),
            strong.goal.target());
  const Scenario& fair = *FindScenario("on-course");
  EXPECT_GT(reading_at(fair, static_cast<double>(fair.sample.scans_planned)),
            1.1 * fair.goal.target());
  EXPECT_LT(reading_at(fair, 0.5 * static_cast<double>(fair.sample.scans_planned)),
            fair.goal.target());
  const Scenario& more = *FindScenario("needs-more");
  EXPECT_LT(reading_at(more, static_cast<double>(more.sample.scans_planned)),
            0.9 * more.goal.target());
  EXPECT_GT(reading_at(more, booked(more)), 1.1 * more.goal.target());
  const Scenario& hopeless = *FindScenario("hopeless");
  EXPECT_LT(reading_at(hopeless, booked(hopeless)), 0.5 * hopeless.goal.target());
  for (const Scenario& scenario : Scenarios()) {
    EXPECT_GE(booked(scenario), static_cast<double>(scenario.sample.scans_planned))
        << scenario.name;
  }
}

TEST(Scenarios, BlankHasNoLineInItsWindows) {
  const Scenario& blank = *FindScenario("blank");
  ASSERT_EQ(blank.goal.windows_size(), 2);
  for (const InventedLine& line : blank.sample.lines) {
    for (const v1::ShiftRange& window : blank.goal.windows()) {
      EXPECT_TRUE(line.shift_ppm < window.low_ppm() - 5 || line.shift_ppm > window.high_ppm() + 5);
    }
  }
}

TEST(Scenarios, SolventIsKnownAndCoversItsLines) {
  for (const Scenario& scenario : Scenarios()) {
    const auto ranges = engine::SolventRanges(scenario.goal.solvent(), scenario.sample.nucleus);
    ASSERT_EQ(ranges.size(), 1u);
    int covered = 0;
    for (const InventedLine& line : scenario.sample.lines) {
      covered += line.shift_ppm > ranges[0].low_ppm() && line.shift_ppm < ranges[0].high_ppm();
    }
    EXPECT_EQ(covered, 3) << scenario.name;
  }
}

TEST(Scenarios, LeakingTubeFadesAsItsTruthSays) {
  const Scenario& leaking = *FindScenario("tube-leaking");
  EXPECT_NEAR(leaking.sample.amplitude(2637), 0.80, 1e-4);
  EXPECT_NEAR(leaking.sample.amplitude(8192), 0.50, 1e-12);
}

}  // namespace
}  // namespace lastscan::rehearsal
