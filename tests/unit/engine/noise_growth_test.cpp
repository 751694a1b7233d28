// How the quiet part of the spectrum grows with scans.
#include "engine/advice/noise_growth.h"

#include <gtest/gtest.h>

#include <cmath>

#include "unit/engine/limits.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

// Marks of an accumulation: each holds the scans of those before it, so its error
// is theirs with a correlation of n/m, and new for the rest.
NoiseGrowth Grown(double exponent, double relative_deviation, Noise& noise) {
  NoiseGrowth growth;
  double error = 0;
  double before = 0;
  for (double scans = 16; scans < 20000; scans += 16) {
    if (!growth.Wants(scans)) continue;
    const double shared = before / scans;
    error = shared * error + std::sqrt(1 - shared * shared) * noise.Next();
    before = scans;
    growth.Add(scans, 5 * std::pow(scans, exponent) * (1 + relative_deviation * error),
               relative_deviation);
  }
  return growth;
}

TEST(NoiseGrowth, IsTheExponentOfAPowerLaw) {
  Noise noise(171);
  for (const double exponent : {0.5, 0.75, 1.0}) {
    const v1::Interval found = Grown(exponent, 0, noise).Exponent();
    EXPECT_NEAR(found.estimate(), exponent, 1e-9);
    EXPECT_NEAR(found.lower(), exponent, 1e-9);
    EXPECT_NEAR(found.upper(), exponent, 1e-9);
  }
}

TEST(NoiseGrowth, LimitsHoldTheExponentNineteenTimesInTwenty) {
  constexpr int kDraws = 1000;
  Noise noise(172);
  int inside = 0;
  for (int draw = 0; draw < kDraws; ++draw) {
    const v1::Interval found = Grown(0.5, 0.02, noise).Exponent();
    inside += found.lower() <= 0.5 && 0.5 <= found.upper() ? 1 : 0;
  }
  EXPECT_GE(inside, FewestHits(kDraws, 0.95));
  EXPECT_LE(inside, MostHits(kDraws, 0.95)) << "normal errors: the limits are exact";
}

TEST(NoiseGrowth, SaysNothingFromFewerThanThreeMarks) {
  NoiseGrowth growth;
  for (const double scans : {0.0, 100.0, 200.0}) {
    EXPECT_EQ(growth.Exponent().estimate(), 0.5);
    EXPECT_EQ(growth.Exponent().lower(), 0);
    EXPECT_EQ(growth.Exponent().upper(), 1);
    if (scans > 0) growth.Add(scans, scans, 0.01);
  }
  growth.Add(400, 400, 0.01);
  EXPECT_NEAR(growth.Exponent().estimate(), 1, 1e-9);
}

TEST(NoiseGrowth, MarksAreHalfAsManyScansApart) {
  NoiseGrowth growth;
  EXPECT_TRUE(growth.Wants(10));
  growth.Add(10, 1, 0.01);
  EXPECT_FALSE(growth.Wants(14.9));
  EXPECT_TRUE(growth.Wants(15));
  growth.Add(15, 0, 0.01);  // silence is no mark
  EXPECT_TRUE(growth.Wants(15));
}

TEST(NoiseGrowth, SavedAndRestoredItGoesOnAsBefore) {
  Noise noise(173);
  const NoiseGrowth growth = Grown(0.6, 0.02, noise);
  state::Run saved;
  growth.SaveTo(saved);
  NoiseGrowth restored;
  restored.RestoreFrom(saved);
  EXPECT_EQ(restored.Exponent().SerializeAsString(), growth.Exponent().SerializeAsString());
  EXPECT_EQ(restored.Wants(25000), growth.Wants(25000));
  EXPECT_LT(saved.noise_marks_size(), 24) << "logarithm of 1,250 to the base of 1.5, and some";
}

}  // namespace
}  // namespace lastscan::engine
