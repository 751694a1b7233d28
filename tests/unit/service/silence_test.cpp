// When a spectrometer counts as silent.
#include "service/silence.h"

#include <gtest/gtest.h>

namespace lastscan::service {
namespace {

constexpr double kRecorded = 1'800'000'000;

TEST(SilenceTest, OneSnapshotExpectsNothing) {
  SilenceWatch watch(3);
  watch.Arrived("a", kRecorded, 0);
  EXPECT_FALSE(watch.NextDue());
  EXPECT_TRUE(watch.Due(1e9).empty());
}

TEST(SilenceTest, TellsOnceAfterThreeIntervals) {
  SilenceWatch watch(3);
  watch.Arrived("a", kRecorded, 0);
  watch.Arrived("a", kRecorded + 10, 10);
  ASSERT_TRUE(watch.NextDue());
  EXPECT_DOUBLE_EQ(*watch.NextDue(), 40);
  EXPECT_TRUE(watch.Due(39.9).empty());
  const auto due = watch.Due(40);
  ASSERT_EQ(due.size(), 1U);
  EXPECT_EQ(due[0].run, "a");
  EXPECT_DOUBLE_EQ(due[0].expected_s, 10);
  EXPECT_DOUBLE_EQ(due[0].silent_s, 30);
  EXPECT_TRUE(watch.Due(1000).empty());
  EXPECT_FALSE(watch.NextDue());
  watch.Arrived("a", kRecorded + 1000, 1000);
  EXPECT_TRUE(watch.NextDue());
}

TEST(SilenceTest, ExpectsTheMedianInterval) {
  SilenceWatch watch(2);
  double now = 0;
  watch.Arrived("a", kRecorded, now);
  for (const double interval : {10.0, 500.0, 12.0, 11.0}) {
    now += interval;
    watch.Arrived("a", kRecorded + now, now);
  }
  EXPECT_DOUBLE_EQ(*watch.NextDue(), now + 2 * 11.5);
}

TEST(SilenceTest, TrustsTheSpectrometersClockWhenSnapshotsArriveInOneGo) {
  SilenceWatch watch(3);
  watch.Arrived("a", kRecorded, 100.0);
  watch.Arrived("a", kRecorded + 60, 100.1);
  watch.Arrived("a", kRecorded + 120, 100.2);
  EXPECT_DOUBLE_EQ(*watch.NextDue(), 100.2 + 180);
}

TEST(SilenceTest, FallsBackOnArrivalsWhenThatClockStandsStill) {
  SilenceWatch watch(3);
  watch.Arrived("a", kRecorded, 0);
  watch.Arrived("a", kRecorded, 20);
  EXPECT_DOUBLE_EQ(*watch.NextDue(), 80);
}

TEST(SilenceTest, ARestartGivesTheFullTime) {
  SilenceWatch watch(3);
  watch.Resume("a", {10, 10, 11}, kRecorded, 5000, false);
  EXPECT_DOUBLE_EQ(*watch.NextDue(), 5030);
  // The pause of the restart itself counts as one interval, not as the usual one.
  watch.Arrived("a", kRecorded + 400, 5005);
  EXPECT_DOUBLE_EQ(*watch.NextDue(), 5005 + 3 * 10.5);
}

TEST(SilenceTest, ASilenceToldBeforeTheRestartIsNotToldAgain) {
  SilenceWatch watch(3);
  watch.Resume("a", {10, 10, 11}, kRecorded, 0, true);
  EXPECT_TRUE(watch.Due(1e6).empty());
  watch.Arrived("a", kRecorded + 400, 1e6);
  EXPECT_DOUBLE_EQ(*watch.NextDue(), 1e6 + 3 * 10.5);
}

TEST(SilenceTest, CanBePostponedAndForgotten) {
  SilenceWatch watch(3);
  watch.Resume("a", {10}, kRecorded, 0, false);
  ASSERT_EQ(watch.Due(30).size(), 1U);
  watch.Postpone("a", 60);
  EXPECT_DOUBLE_EQ(*watch.NextDue(), 60);
  EXPECT_TRUE(watch.Due(59).empty());
  EXPECT_EQ(watch.Due(60).size(), 1U);
  watch.Postpone("a", 90);
  watch.Forget("a");
  EXPECT_FALSE(watch.NextDue());
  watch.Postpone("a", 90);  // too late, and harmless
  EXPECT_FALSE(watch.NextDue());
}

TEST(SilenceTest, RunsAreWatchedApart) {
  SilenceWatch watch(3);
  watch.Resume("slow", {1000}, kRecorded, 0, false);
  watch.Resume("quick", {1}, kRecorded, 0, false);
  EXPECT_DOUBLE_EQ(*watch.NextDue(), 3);
  ASSERT_EQ(watch.Due(10).size(), 1U);
  EXPECT_DOUBLE_EQ(*watch.NextDue(), 3000);
}

TEST(SilenceTest, ForgetsOldIntervals) {
  SilenceWatch watch(2);
  double now = 0;
  watch.Arrived("a", kRecorded, now);
  const auto arrive = [&](std::size_t times, double interval) {
    for (std::size_t i = 0; i < times; ++i) {
      now += interval;
      watch.Arrived("a", kRecorded + now, now);
    }
  };
  arrive(10 * kMostIntervals, 100);
  arrive(kMostIntervals, 1);
  EXPECT_DOUBLE_EQ(*watch.NextDue(), now + 2);
}

}  // namespace
}  // namespace lastscan::service
