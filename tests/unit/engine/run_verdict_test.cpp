// How a run's advice follows its booking, its goal and what was said before.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include "engine/run.h"
#include "unit/engine/run_bench.h"

namespace lastscan::engine {
namespace {

using ::testing::HasSubstr;
using ::testing::Not;

constexpr std::int64_t kBegun = 1'800'000'000;

// `sent` with a booking that leaves room for `scans` scans of 2.5 s.
std::vector<Sent> Booked(std::vector<Sent> sent, double scans) {
  for (Sent& each : sent) {
    each.snapshot.mutable_booking_end()->set_seconds(kBegun +
                                                     static_cast<std::int64_t>(2.5 * scans));
  }
  return sent;
}

TEST(RunVerdict, ABookingBoundsWhatIsAdvised) {
  // Truth: 22 at 484 scans. The plan has 256, the booking room for 384.
  rehearsal::InventedSample sample = OneLine(1);
  sample.scans_planned = 256;
  const std::vector<Sent> sent = Snapshots(sample, Every(16, 14), WindowGoal(22), 3);
  bool extended = false;
  for (const v1::Advice& advice : Played(Booked(sent, 389))) {
    extended = extended || advice.verdict() == v1::EXTEND;
    EXPECT_LE(advice.scans_advised(), 384u) << advice.because();
    EXPECT_EQ(advice.scans_advised() % 8, 0u);
    if (advice.verdict() == v1::EXTEND) {
      EXPECT_THAT(advice.because(), HasSubstr("booking's end"));
    }
  }
  EXPECT_TRUE(extended);
  // With more room the same run is told what it truly needs.
  const v1::Advice free = Played(Booked(sent, 4000)).back();
  EXPECT_EQ(free.verdict(), v1::EXTEND);
  EXPECT_GT(free.scans_advised(), 384u);
  EXPECT_GT(free.chance_by_booking_end(), 0.99);
}

TEST(RunVerdict, APlanTheBookingCannotHoldIsNotAdvisedEither) {
  rehearsal::InventedSample sample = OneLine(0.3);  // unsure for long
  sample.scans_planned = 1000;
  for (const v1::Advice& advice :
       Played(Booked(Snapshots(sample, Every(16, 10), WindowGoal(5)), 500))) {
    if (advice.seconds_per_scan() == 0) continue;  // the booking is no scans yet
    EXPECT_LE(advice.scans_advised(), 500u) << advice.because();
    EXPECT_EQ(advice.scans_advised() % 8, 0u);
  }
}

TEST(RunVerdict, APlanThatIsNoWholeCycleIsRoundedUp) {
  rehearsal::InventedSample sample = OneLine(0.3);
  sample.scans_planned = 1001;
  for (const v1::Advice& advice : Played(Snapshots(sample, Every(20, 10), WindowGoal(5)))) {
    EXPECT_EQ(advice.scans_advised() % 8, 0u) << v1::Verdict_Name(advice.verdict());
  }
}

TEST(RunVerdict, ThePredictionAtThePlannedEndIsForThePlannedScans) {
  rehearsal::InventedSample sample = OneLine(1);
  const std::vector<Sent> sent = Snapshots(sample, Every(16, 16), WindowGoal(40));
  const v1::Advice open = Played(sent).back();
  EXPECT_NEAR(open.at_planned_end().estimate(), open.signal_to_noise().estimate() * 2, 1e-9)
      << "256 scans done, 1,024 planned";
  const v1::Advice booked = Played(Booked(sent, 500)).back();
  EXPECT_NEAR(booked.at_planned_end().estimate(), open.at_planned_end().estimate(), 1e-9)
      << "whether or not the booking holds them";
}

TEST(RunVerdict, ASiteEventEndsTheBookingAndIsNamed) {
  rehearsal::InventedSample sample = OneLine(1);
  sample.scans_planned = 256;
  v1::EngineSettings settings = DefaultSettings();
  v1::SiteEvent& fill = *settings.add_events();
  fill.set_instrument("bench-1");
  fill.set_what("helium fill");
  fill.mutable_begins_at()->set_seconds(kBegun + 1000);  // 400 scans of 2.5 s
  v1::SiteEvent& elsewhere = *settings.add_events();
  elsewhere.set_instrument("bench-2");
  elsewhere.set_what("open day");
  elsewhere.mutable_begins_at()->set_seconds(kBegun + 800);
  v1::SiteEvent& over = *settings.add_events();
  over.set_what("power test");
  over.mutable_begins_at()->set_seconds(kBegun - 500);

  const std::vector<Sent> sent = Booked(Snapshots(sample, Every(16, 15), WindowGoal(20)), 4000);
  const v1::Advice with = Played(sent, settings).back();
  EXPECT_EQ(with.verdict(), v1::EXTEND);
  EXPECT_THAT(with.because(), HasSubstr("helium fill"));
  EXPECT_THAT(with.because(), Not(HasSubstr("open day")));
  EXPECT_THAT(with.because(), Not(HasSubstr("power test")));
  EXPECT_LE(with.scans_advised(), 400u);
  const v1::Advice without = Played(sent).back();
  EXPECT_THAT(without.because(), Not(HasSubstr("helium fill")));
  EXPECT_GT(without.chance_by_booking_end(), with.chance_by_booking_end());
}

TEST(RunVerdict, EnoughStaysEnoughWhateverComesAfter) {
  rehearsal::InventedSample sample = OneLine(2);
  sample.amplitude = [](std::uint64_t scan) { return scan > 256 ? 0.0 : 1.0; };
  sample.lock_level = [](std::uint64_t scan) { return scan > 256 ? 0.0 : 0.9; };
  bool enough = false;
  for (const v1::Advice& advice : Played(Snapshots(sample, Every(32, 60), WindowGoal(15)))) {
    if (enough) {
      EXPECT_EQ(advice.verdict(), v1::ENOUGH) << advice.scans_done();
    }
    if (advice.verdict() != v1::ENOUGH) continue;
    enough = true;
    EXPECT_LT(advice.scans_advised() - advice.scans_done(), 8u) << "the next whole phase cycle";
    EXPECT_EQ(advice.scans_saved(), advice.scans_planned() > advice.scans_advised()
                                        ? advice.scans_planned() - advice.scans_advised()
                                        : 0);
    EXPECT_NEAR(advice.seconds_saved(), 2.5 * static_cast<double>(advice.scans_saved()), 1e-6);
  }
  EXPECT_TRUE(enough);
}

TEST(RunVerdict, AnotherGoalIsJudgedAfresh) {
  std::vector<Sent> sent = Snapshots(OneLine(2), Every(32, 8), WindowGoal(15));
  EXPECT_EQ(Played(sent).back().verdict(), v1::ENOUGH);
  sent.back().snapshot.mutable_goal()->set_target(200);
  EXPECT_NE(Played(sent).back().verdict(), v1::ENOUGH);
}

TEST(RunVerdict, ALineThatIsExcludedLaterCountsNoMore) {
  v1::Goal goal;
  goal.set_target(10);
  goal.set_broadening_hz(2);
  goal.set_lines(1);
  // The operator sees that the line is an impurity and excludes it: nothing is
  // left, and what was confirmed before must not vouch for noise.
  for (std::uint64_t seed = 1; seed <= 20; ++seed) {
    std::vector<Sent> sent = Snapshots(OneLine(2), Every(32, 8), goal, seed);
    ASSERT_TRUE(Played(sent).back().limiting_line().confirmed());
    *sent.back().snapshot.mutable_goal()->add_excluded() = ShiftsFrom(100.5, 102);
    const v1::Advice advice = Played(sent).back();
    EXPECT_FALSE(advice.limiting_line().confirmed()) << "seed " << seed;
    EXPECT_EQ(advice.signal_to_noise().estimate(), 0);
    EXPECT_EQ(advice.lines_size(), 0);
  }
}

TEST(RunVerdict, AHopelessRunIsToldWhatWouldHelp) {
  rehearsal::InventedSample sample = OneLine(0.2);
  const std::vector<Sent> sent = Booked(Snapshots(sample, Every(32, 16), WindowGoal(40)), 1024);
  const v1::Advice advice = Played(sent).back();
  EXPECT_EQ(advice.verdict(), v1::OUT_OF_REACH);
  EXPECT_LT(advice.chance_by_booking_end(), 0.05);
  EXPECT_THAT(advice.because(), HasSubstr("What would help"));
  EXPECT_THAT(advice.because(), HasSubstr("times the concentration"));
}

TEST(RunVerdict, AFaultOfHighSeverityCallsForALook) {
  rehearsal::InventedSample sample = OneLine(1);
  sample.lock_level = [](std::uint64_t scan) { return scan > 100 ? 0.1 : 0.9; };
  const auto advice = Played(Snapshots(sample, Every(32, 5), WindowGoal(40)));
  EXPECT_NE(advice[2].verdict(), v1::INSPECT);
  EXPECT_EQ(advice[3].verdict(), v1::INSPECT);
  EXPECT_THAT(advice[3].because(), HasSubstr("lock level"));
}

TEST(RunVerdict, AnEndedRunIsNotToldToGoOn) {
  rehearsal::InventedSample sample = OneLine(1);
  sample.scans_planned = 256;
  std::vector<Sent> sent = Snapshots(sample, Every(32, 8), WindowGoal(40));
  sent.back().snapshot.set_final(true);
  const v1::Advice advice = Played(sent).back();
  EXPECT_EQ(advice.verdict(), v1::EXTEND);
  EXPECT_THAT(advice.because(), HasSubstr("The run has ended short of its goal"));
  EXPECT_THAT(advice.because(), Not(HasSubstr(": add ")));
}

TEST(RunVerdict, FromThePastOrWithNoTimeAtAllThereIsStillAdvice) {
  std::vector<Sent> sent = Snapshots(OneLine(1), Every(32, 6), WindowGoal(20));
  for (Sent& each : sent) each.snapshot.clear_recorded_at();
  for (const v1::Advice& advice : Played(sent)) {
    EXPECT_EQ(advice.seconds_per_scan(), 0);
    EXPECT_FALSE(advice.has_finish_at());
    EXPECT_NE(advice.verdict(), v1::VERDICT_UNSPECIFIED);
  }
}

}  // namespace
}  // namespace lastscan::engine
