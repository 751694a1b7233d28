// The engine's distributions and quantiles against SciPy's own, computed by
// scipy_values.py along other ways than the engine's.
#include <gtest/gtest.h>

#include <cmath>
#include <vector>

#include "engine/forecast/extrapolation.h"
#include "engine/forecast/stop_boundary.h"
#include "engine/sensitivity/convention.h"
#include "engine/sensitivity/evidence.h"
#include "engine/sensitivity/noise.h"
#include "engine/sensitivity/posterior.h"
#include "engine/sensitivity/survey.h"
#include "published/script.h"

namespace lastscan::engine {
namespace {

using published::Argument;
using published::SciPy;

TEST(StatisticsAgainstSciPy, ChiSquareMedians) {
  // 1 and 2: one increment of a real and a complex bin; 62: 32 increments.
  const std::vector<double> degrees = {1, 2, 3, 14, 62, 510, 4094};
  const std::vector<double> expected = SciPy("chi_square_median", degrees);
  ASSERT_EQ(expected.size(), degrees.size());
  for (std::size_t i = 0; i < degrees.size(); ++i) {
    EXPECT_NEAR(ChiSquareMedian(degrees[i]) / expected[i], 1, 1e-10) << degrees[i];
  }
}

// The engine's is the formula for large samples; SciPy integrates the exact
// distribution of the middle one of 1,001 values.
TEST(StatisticsAgainstSciPy, DeviationOfANoiseReadAsAMedian) {
  for (const double degrees : {2.0, 14.0, 62.0}) {
    const double expected = SciPy("deviation_of_median", {degrees, 1001}).at(0);
    EXPECT_NEAR(RelativeDeviationOfMedian(degrees, 1001) / expected, 1, 0.01) << degrees;
  }
}

TEST(StatisticsAgainstSciPy, NormalQuantiles) {
  const std::vector<double> shares = {0.001, 0.025, 0.05, 0.3, 0.5, 0.9, 0.975, 0.999};
  const std::vector<double> expected = SciPy("normal_quantile", shares);
  ASSERT_EQ(expected.size(), shares.size());
  // A line that stands far out, with nothing chosen, is read with a normal error.
  const AmplitudePosterior posterior = AmplitudePosterior::OfLine(50, 0, 1);
  for (std::size_t i = 0; i < shares.size(); ++i) {
    // 400 steps over 14 deviations; the quantile is interpolated between them.
    EXPECT_NEAR(posterior.Quantile(shares[i]), 50 + expected[i], 2e-3) << shares[i];
  }
  const Reading reading = ReadingOf(50, 0, 0);
  EXPECT_NEAR(reading.lower, 50 + expected[1], 1e-6);
  EXPECT_NEAR(reading.upper, 50 + expected[6], 1e-6);
  // A single look has no more to guard against than its own error.
  EXPECT_NEAR(StopMargin(30, 1, 0.05), -expected[2], 2e-4);
  EXPECT_NEAR(StopMargin(30, 1, 0.025), expected[6], 2e-4);
}

TEST(StatisticsAgainstSciPy, ChanceOfALaterReading) {
  struct Case {
    double threshold, reading, deviation, scans, later;
  };
  for (const Case& c : std::vector<Case>{{10, 8, 1, 100, 200},
                                         {10, 8, 1, 100, 130},
                                         {12, 5, 1, 16, 64},
                                         {40, 20, 1.4, 32, 128},
                                         {9, 12, 1.05, 100, 101}}) {
    const double expected =
        SciPy("chance_of_reading", {c.threshold, c.reading, c.deviation, c.scans, c.later}).at(0);
    EXPECT_NEAR(ChanceOfReading(c.threshold, c.reading, c.deviation, c.scans, c.later), expected,
                2e-4)
        << c.threshold << " after " << c.later;
  }
}

TEST(StatisticsAgainstSciPy, ExpectedRange) {
  const std::vector<double> counts = {2, 3, 5, 10, 25, 37.5, 100, 1000, 20000};
  const std::vector<double> expected = SciPy("expected_range", counts);
  ASSERT_EQ(expected.size(), counts.size());
  for (std::size_t i = 0; i < counts.size(); ++i) {
    EXPECT_NEAR(ExpectedRange(counts[i]), expected[i], 1e-6) << counts[i];
  }
}

// Where the evidence for a line is 1 to a level: the engine has it in closed
// form, SciPy averages likelihood ratios over the drifts.
TEST(StatisticsAgainstSciPy, BoundaryOfTheMixtureEvidence) {
  const std::vector<double> scans = {16, 64, 1024};
  for (const double quadratures : {1.0, 2.0}) {
    for (const double level : {100.0, 1e6}) {
      std::vector<double> arguments = {4, quadratures, level};
      arguments.insert(arguments.end(), scans.begin(), scans.end());
      const std::vector<double> expected = SciPy("mixture_boundary", arguments);
      ASSERT_EQ(expected.size(), scans.size());
      for (std::size_t i = 0; i < scans.size(); ++i) {
        const MixtureEvidence evidence(scans[i], 4, static_cast<int>(quadratures));
        EXPECT_NEAR(evidence.ReadingAt(level), expected[i], 1e-6)
            << quadratures << " quadratures, " << scans[i] << " scans, level " << level;
      }
    }
  }
}

TEST(StatisticsAgainstSciPy, UpperLimitOfALineNotSeenYet) {
  const std::vector<float> readings = {0.4F, 1.1F, 2.0F, 3.0F, 1.5F, 0.8F, 1.9F, 2.4F};
  for (const int quadratures : {1, 2}) {
    std::vector<std::string> arguments = {std::to_string(quadratures)};
    for (float reading : readings) arguments.push_back(Argument(reading));
    for (const char* last : {"--", "0.5", "0.975"}) arguments.emplace_back(last);
    const std::vector<double> expected = SciPy("unseen_quantiles", arguments);
    ASSERT_EQ(expected.size(), 2u);
    const AmplitudePosterior posterior = AmplitudePosterior::OfUnseen(readings, quadratures);
    // The engine's grid is 0.1 wide and counts readings in cells of 0.04.
    EXPECT_NEAR(posterior.Quantile(0.5), expected[0], 0.05) << quadratures;
    EXPECT_NEAR(posterior.Quantile(0.975), expected[1], 0.05) << quadratures;
  }
}

}  // namespace
}  // namespace lastscan::engine
