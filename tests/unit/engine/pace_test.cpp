// Seconds per scan from the times of the snapshots, and whole phase cycles.
#include "engine/forecast/pace.h"

#include <gtest/gtest.h>

namespace lastscan::engine {
namespace {

TEST(Pace, IsNotKnownFromOneSnapshot) {
  Pace pace;
  EXPECT_EQ(pace.SecondsPerScan(), 0);
  pace.Add(1.8e9, 16);
  EXPECT_EQ(pace.SecondsPerScan(), 0);
  pace.Add(1.8e9 + 40, 32);
  EXPECT_DOUBLE_EQ(pace.SecondsPerScan(), 2.5);
}

TEST(Pace, TheMedianLeavesPausesOut) {
  Pace pace;
  double now = 1.8e9;
  for (int look = 1; look <= 20; ++look) {
    now += 40;
    if (look % 4 == 0) now += 7200;  // somebody else had the magnet
    pace.Add(now, 16 * look);
  }
  EXPECT_DOUBLE_EQ(pace.SecondsPerScan(), 2.5);
}

TEST(Pace, AClockThatWasSetBackSaysNothing) {
  Pace pace;
  pace.Add(1000, 10);
  pace.Add(1020, 20);
  pace.Add(500, 30);  // set back
  pace.Add(500, 40);  // stamped alike
  pace.Add(520, 50);  // and on from there
  EXPECT_EQ(pace.intervals(), (std::vector<double>{2, 2}));
  EXPECT_DOUBLE_EQ(pace.SecondsPerScan(), 2);
}

TEST(Pace, FollowsANewPaceAndKeepsNoMoreThanItMust) {
  Pace pace;
  for (int look = 1; look <= 200; ++look) pace.Add(10.0 * look, 4.0 * look);
  EXPECT_EQ(pace.intervals().size(), Pace::kKept);
  EXPECT_DOUBLE_EQ(pace.SecondsPerScan(), 2.5);
  const double seconds = pace.last_seconds();
  const double scans = pace.last_scans();
  for (int look = 1; look <= 40; ++look) pace.Add(seconds + 20.0 * look, scans + 4.0 * look);
  EXPECT_DOUBLE_EQ(pace.SecondsPerScan(), 5) << "more than half of what is kept";
}

TEST(Pace, RestoredItGoesOnAsBefore) {
  Pace pace;
  for (int look = 1; look <= 5; ++look) pace.Add(7.0 * look * look, 4.0 * look);
  Pace restored;
  restored.Restore(pace.intervals(), pace.last_seconds(), pace.last_scans());
  pace.Add(400, 40);
  restored.Add(400, 40);
  EXPECT_EQ(restored.intervals(), pace.intervals());
  EXPECT_EQ(restored.SecondsPerScan(), pace.SecondsPerScan());
}

TEST(WholeCycles, RoundsUp) {
  EXPECT_EQ(WholeCycles(64, 8), 64u);
  EXPECT_EQ(WholeCycles(64.01, 8), 72u);
  EXPECT_EQ(WholeCycles(1, 8), 8u);
  EXPECT_EQ(WholeCycles(0, 8), 0u);
  EXPECT_EQ(WholeCycles(17.2, 0), 18u) << "no cycle is a cycle of one";
  // A product of roots that should be whole and is not, quite.
  EXPECT_EQ(WholeCycles(64.00000000001, 8), 64u);
  EXPECT_EQ(WholeCycles(1e15, 16), 1000000000000000u);
}

}  // namespace
}  // namespace lastscan::engine
