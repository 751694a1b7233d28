// Signal-to-noise as laboratories state it.
#include "engine/sensitivity/convention.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <numbers>

#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

TEST(ExpectedRange, IsTippettsConstant) {
  // Tippett, Biometrika 1925, 17, 364; values from memory. The first two have
  // closed forms: 2 over the root of pi and 3 over the root of pi.
  EXPECT_NEAR(ExpectedRange(2), 2 / std::sqrt(std::numbers::pi), 1e-9);
  EXPECT_NEAR(ExpectedRange(3), 3 / std::sqrt(std::numbers::pi), 1e-9);
  EXPECT_NEAR(ExpectedRange(5), 2.326, 0.0005);
  EXPECT_NEAR(ExpectedRange(10), 3.078, 0.0005);
  EXPECT_NEAR(ExpectedRange(25), 3.931, 0.0005);
  EXPECT_NEAR(ExpectedRange(100), 5.015, 0.0005);
}

TEST(ExpectedRange, IsTheMeanRangeOfDrawnNoise) {
  constexpr int kDraws = 4000;
  Noise noise(81);
  for (const int count : {7, 300}) {
    double sum = 0;
    double squares = 0;
    for (int draw = 0; draw < kDraws; ++draw) {
      double low = noise.Next();
      double high = low;
      for (int i = 1; i < count; ++i) {
        const double value = noise.Next();
        low = std::min(low, value);
        high = std::max(high, value);
      }
      sum += high - low;
      squares += (high - low) * (high - low);
    }
    const double mean = sum / kDraws;
    const double error = std::sqrt((squares / kDraws - mean * mean) / kDraws);
    EXPECT_LT(std::abs(mean - ExpectedRange(count)), 3.29 * error) << count;
  }
}

TEST(ExpectedRange, RisesBetweenWholeNumbersToo) {
  double before = ExpectedRange(2);
  for (double count = 2.5; count < 2000; count *= 1.3) {
    const double range = ExpectedRange(count);
    EXPECT_GT(range, before);
    before = range;
  }
}

TEST(ConventionFactor, TurnsHeightOverRmsIntoWhatTheLabStates) {
  EXPECT_EQ(ConventionFactor(v1::HEIGHT_OVER_RMS), 1);
  EXPECT_EQ(ConventionFactor(v1::HEIGHT_OVER_TWICE_RMS), 0.5);
  // 2.5 H/h: the definition of the pharmacopoeias and of ASTM E386 (from
  // memory). With about 100 points it is H over twice the rms.
  EXPECT_NEAR(ConventionFactor(v1::PEAK_TO_PEAK), 2.5 / 5.015, 1e-4);
  EXPECT_DOUBLE_EQ(ConventionFactor(v1::PEAK_TO_PEAK, 40), 2.5 / ExpectedRange(40));
}

}  // namespace
}  // namespace lastscan::engine
