// The root-of-scans law: forecasts hold what is read later as often as they
// say, and chances come true as often as they promise.
#include "engine/forecast/extrapolation.h"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>

#include "unit/engine/limits.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

TEST(ReadingLater, GrowsAsTheRootOfScans) {
  // Common practice, no source: four times the scans, twice the ratio.
  const Spread spread = ReadingLater(10, 1, 256, 1024);
  EXPECT_DOUBLE_EQ(spread.centre, 20);
  EXPECT_DOUBLE_EQ(spread.deviation, std::sqrt(3));
  const Spread unsure = ReadingLater(10, 2, 256, 1024);
  EXPECT_DOUBLE_EQ(unsure.deviation, std::sqrt(3.0 + 4 * 3));
  for (const double later : {256.0, 100.0}) {
    EXPECT_EQ(ReadingLater(10, 1, 256, later).centre, 10);
    EXPECT_EQ(ReadingLater(10, 1, 256, later).deviation, 0);
  }
}

TEST(ReadingLater, HoldsTheLaterReadingNineteenTimesInTwenty) {
  constexpr int kDraws = 4000;
  for (const auto& [scans, later] : {std::pair(64.0, 80.0), std::pair(64.0, 1024.0)}) {
    Noise noise(151);
    int inside = 0;
    for (int draw = 0; draw < kDraws; ++draw) {
      const double theta = noise.Uniform(0.5, 3);
      const double now = theta * scans + std::sqrt(scans) * noise.Next();
      const double then = now + theta * (later - scans) + std::sqrt(later - scans) * noise.Next();
      const Spread spread = ReadingLater(now / std::sqrt(scans), 1, scans, later);
      inside += std::abs(then / std::sqrt(later) - spread.centre) < 1.96 * spread.deviation ? 1 : 0;
    }
    EXPECT_GE(inside, FewestHits(kDraws, 0.95)) << later;
    EXPECT_LE(inside, MostHits(kDraws, 0.95)) << later;
  }
}

TEST(ScansForTarget, GoAsTheSquareOfTheRatio) {
  EXPECT_DOUBLE_EQ(ScansForTarget(20, 10, 64), 256);
  EXPECT_DOUBLE_EQ(ScansForTarget(5, 10, 64), 16);
  EXPECT_TRUE(std::isinf(ScansForTarget(5, 0, 64)));
  // Common practice, no source: half the concentration needs four times the
  // scans, 64 scans of 5 mg are 16 scans of 10 mg.
  EXPECT_DOUBLE_EQ(ScansForTarget(8, 8.0, 16) * 4, ScansForTarget(8, 4.0, 16));
}

// Sum of (came true - promised) over its own standard deviation.
class Promises {
 public:
  void Add(double promised, bool came_true) {
    excess_ += (came_true ? 1.0 : 0.0) - promised;
    variance_ += promised * (1 - promised);
  }
  double Score() const { return excess_ / std::sqrt(variance_); }
  double variance() const { return variance_; }

 private:
  double excess_ = 0;
  double variance_ = 0;
};

TEST(ChanceOfReading, ComesTrueAsOftenAsPromised) {
  // The truth drawn evenly over far more than one look can tell apart: a flat
  // prior, for which the chance is exact.
  constexpr int kDraws = 40000;
  constexpr double kScans = 64;
  Noise noise(152);
  Promises low;
  Promises high;
  for (int draw = 0; draw < kDraws; ++draw) {
    const double truth = noise.Uniform(-10, 45);  // signal-to-noise at kScans
    const double later = noise.Uniform(1, 8) * kScans;
    const double now = truth + noise.Next();
    const double w = now * std::sqrt(kScans);
    const double then =
        w + truth / std::sqrt(kScans) * (later - kScans) + std::sqrt(later - kScans) * noise.Next();
    const double chance = ChanceOfReading(30, now, 1, kScans, later);
    (chance < 0.5 ? low : high).Add(chance, then / std::sqrt(later) >= 30);
  }
  EXPECT_GT(low.variance(), 100) << "or nothing was put to the test";
  EXPECT_GT(high.variance(), 100);
  EXPECT_LT(std::abs(low.Score()), 3.29);
  EXPECT_LT(std::abs(high.Score()), 3.29);
}

TEST(ChanceOfReading, NoMoreScansNoMoreChance) {
  EXPECT_EQ(ChanceOfReading(10, 11, 1, 64, 64), 1);
  EXPECT_EQ(ChanceOfReading(10, 9.9, 1, 64, 64), 0);
  EXPECT_EQ(ChanceOfReading(1e9, 1, 1, 64, 65), 0);
  EXPECT_EQ(ChanceOfReading(10, 1e9, 1, 64, 65), 1);
}

TEST(ChanceOfReading, OfALineNotSeenYetComesTrueAsOftenAsPromised) {
  // A line of any strength from 0 to 9 in one of 60 bins, read where it truly
  // is later; promised from all bins alike.
  constexpr int kDraws = 10000;
  Noise noise(153);
  Promises low;
  Promises high;
  for (int draw = 0; draw < kDraws; ++draw) {
    const double truth = noise.Uniform(0, 9);
    std::vector<float> readings;
    for (int j = 0; j < 60; ++j) readings.push_back(static_cast<float>(noise.Next()));
    const double now = truth + readings[17];
    readings[17] = static_cast<float>(now);
    const auto posterior = AmplitudePosterior::OfUnseen(readings, 1);
    const double later = noise.Uniform(1.5, 6);
    const double then =
        (now + truth * (later - 1) + std::sqrt(later - 1) * noise.Next()) / std::sqrt(later);
    const double chance = ChanceOfReading(8, posterior, 1, later);
    (chance < 0.5 ? low : high).Add(chance, then >= 8);
  }
  EXPECT_GT(low.variance(), 50);
  EXPECT_GT(high.variance(), 50);
  EXPECT_LT(std::abs(low.Score()), 3.29);
  EXPECT_LT(std::abs(high.Score()), 3.29);
}

TEST(ChanceOfReading, OfALineNotSeenYetIsNoneWithoutMoreScans) {
  const auto posterior = AmplitudePosterior::OfUnseen(std::vector<float>{1, 2, 3}, 1);
  EXPECT_EQ(ChanceOfReading(1, posterior, 64, 64), 0);
  EXPECT_GT(ChanceOfReading(1, posterior, 64, 6400), 0.9);
}

}  // namespace
}  // namespace lastscan::engine
