// The noise of one scan from the scatter of increments: free of any constant
// line, and as sure as it says.
#include "engine/sensitivity/noise.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <boost/math/special_functions/erf.hpp>
#include <cmath>
#include <numbers>

#include "engine/spectrum/transform.h"
#include "unit/engine/limits.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

constexpr double kSingleRounding = 0x1p-24;  // relative, of a float

TEST(ChiSquareMedian, SplitsTheDistributionInHalf) {
  // Closed forms: one degree by the error function, even ones by the sum
  // 1 - exp(-x/2) sum (x/2)^i / i!.
  EXPECT_NEAR(boost::math::erf(std::sqrt(ChiSquareMedian(1) / 2)), 0.5, 1e-12);
  EXPECT_NEAR(ChiSquareMedian(2), 2 * std::numbers::ln2, 1e-12);
  for (const int degrees : {4, 14, 126, 1000}) {
    const double half = ChiSquareMedian(degrees) / 2;
    double term = std::exp(-half);
    double above = term;
    for (int i = 1; i < degrees / 2; ++i) above += term *= half / i;
    EXPECT_NEAR(above, 0.5, 1e-9) << degrees;
  }
}

TEST(RelativeDeviationOfMedian, IsTheScatterOfSigmaOverManyDraws) {
  constexpr int kDraws = 3000;
  constexpr int kCount = 401;
  for (const int degrees : {2, 6}) {
    Noise noise(31);
    double squares = 0;
    for (int draw = 0; draw < kDraws; ++draw) {
      std::vector<double> values(kCount);
      for (double& value : values) {
        for (int i = 0; i < degrees; ++i) value += std::pow(noise.Next(), 2);
      }
      std::nth_element(values.begin(), values.begin() + kCount / 2, values.end());
      const double sigma = std::sqrt(values[kCount / 2] / ChiSquareMedian(degrees));
      squares += std::pow(sigma - 1, 2);
    }
    const double chi = squares / std::pow(RelativeDeviationOfMedian(degrees, kCount), 2);
    EXPECT_GT(chi, LowestChiSquare(kDraws)) << degrees;
    EXPECT_LT(chi, HighestChiSquare(kDraws)) << degrees;
  }
}

// Accumulations after each of `increments` more scans: noise of rms 1 per scan,
// and `line` per scan in the bins of `at`.
struct Series {
  Series(std::size_t bins, const std::vector<double>& increments, std::uint64_t seed, Complex line,
         const std::vector<std::size_t>& at)
      : sum(bins) {
    Noise noise(seed);
    for (const double m : increments) {
      noise.AddTo(sum, std::sqrt(m));
      scans += m;
      Points seen = sum;
      for (const std::size_t bin : at) seen[bin] += line * scans;
      accumulations.push_back(seen);
      totals.push_back(scans);
    }
  }
  Points sum;
  double scans = 0;
  std::vector<Points> accumulations;
  std::vector<double> totals;
};

Scatter ScatterOf(const Series& series) {
  Scatter scatter;
  for (std::size_t k = 0; k < series.totals.size(); ++k) {
    scatter.Add(series.accumulations[k], series.totals[k], 1, true, 1);
  }
  return scatter;
}

TEST(Scatter, HoldsNoConstantLineHoweverStrong) {
  const std::vector<double> increments = {4, 1, 7, 2, 2, 8};
  const std::vector<std::size_t> at = {3, 100, 101, 255};
  const Scatter without = ScatterOf(Series(256, increments, 41, 0, {}));
  const Complex line = std::polar(1e6 / std::sqrt(24.0), 0.8);  // 1e6 times the noise at the end
  const Series series(256, increments, 41, line, at);
  const Scatter with = ScatterOf(series);
  // What rounding the sum to single precision can do to the root of one term:
  // the error of the sum before, times 1/m + 1/n, times the root of m n / (n+m).
  double bound = 0;
  for (std::size_t k = 1; k < series.totals.size(); ++k) {
    const double n = series.totals[k - 1];
    const double m = series.totals[k] - n;
    bound += 2 * kSingleRounding * std::abs(line) * n * std::sqrt((n + m) / (n * m));
  }
  ASSERT_LT(bound, 1.5) << "so the line, 1e6 strong, is gone to a millionth";
  for (const std::size_t bin : at) {
    EXPECT_NEAR(std::sqrt(with.values()[bin]), std::sqrt(without.values()[bin]), bound);
  }
  EXPECT_EQ(with.values()[50], without.values()[50]);
  // Four bins of 256 are touched at all, so the median moves by four places at
  // most, of the values sorted.
  std::vector<float> sorted = without.values();
  std::sort(sorted.begin(), sorted.end());
  const double degrees = 2.0 * (static_cast<double>(increments.size()) - 1);
  const auto place = [&](std::size_t i) { return std::sqrt(sorted[i] / ChiSquareMedian(degrees)); };
  const double estimate = with.Estimate(true, 1, 256).per_scan;
  EXPECT_GE(estimate, place(127 - 4));
  EXPECT_LE(estimate, place(128 + 4));
}

TEST(Scatter, IsTheSumOverIncrementsLessTheSquareOfTheSum) {
  const std::vector<double> increments = {4, 1, 7, 2};
  const Series series(64, increments, 42, Complex(3, 1), {5});
  const Scatter scatter = ScatterOf(series);
  EXPECT_EQ(scatter.increments(), 4);
  EXPECT_EQ(scatter.scans(), 14);
  for (std::size_t j = 0; j < 64; ++j) {
    double expected = -std::norm(series.accumulations.back()[j]) / 14;
    Complex before = 0;
    for (std::size_t k = 0; k < increments.size(); ++k) {
      expected += std::norm(series.accumulations[k][j] - before) / increments[k];
      before = series.accumulations[k][j];
    }
    EXPECT_NEAR(scatter.values()[j], expected, 1e-5 * (1 + expected)) << "bin " << j;
  }
}

TEST(Scatter, TheEstimateIsAsSureAsItSays) {
  // Unequal increments, from many bins that are all independent.
  constexpr int kDraws = 600;
  int inside = 0;
  double mean = 0;
  double deviation = 0;
  for (int draw = 0; draw < kDraws; ++draw) {
    const Series series(512, {3, 10, 1, 6}, 1000 + draw, 0, {});
    const NoiseEstimate noise = ScatterOf(series).Estimate(true, 1, 512);
    EXPECT_TRUE(noise.from_increments);
    deviation = noise.relative_deviation;
    inside += std::abs(noise.per_scan - 1) < 1.96 * deviation ? 1 : 0;
    mean += noise.per_scan / kDraws;
  }
  EXPECT_GE(inside, FewestHits(kDraws, 0.95));
  EXPECT_LE(inside, MostHits(kDraws, 0.95));
  EXPECT_LT(std::abs(mean - 1), 3.29 * deviation / std::sqrt(kDraws)) << "without bias";
}

TEST(Scatter, TheEstimateHoldsForZeroFilledAndBroadenedSpectra) {
  // Neighbouring bins are alike here; the deviation must not count them twice.
  constexpr int kDraws = 300;
  for (const std::uint32_t points : {256u, 300u}) {
    for (const double broadening : {0.0, 6.0}) {
      const Transform transform(PlainSnapshot(points), broadening);
      Noise noise(44);
      int inside = 0;
      double mean = 0;
      double deviation = 0;
      for (int draw = 0; draw < kDraws; ++draw) {
        Scatter scatter;
        Points sum(points);
        for (int k = 1; k <= 3; ++k) {
          noise.AddTo(sum, 1);
          scatter.Add(transform.Apply(sum), k, 1, true, transform.fill_ratio());
        }
        const NoiseEstimate estimate =
            scatter.Estimate(true, transform.fill_ratio(), transform.independent_bins());
        // The halved first point is three quarters of one point less of power.
        const double truth = std::sqrt(std::pow(transform.noise_gain(), 2) - 0.75);
        deviation = estimate.relative_deviation;
        inside += std::abs(estimate.per_scan / truth - 1) < 1.96 * deviation ? 1 : 0;
        mean += estimate.per_scan / truth / kDraws;
      }
      EXPECT_GE(inside, FewestHits(kDraws, 0.95)) << points << " points, " << broadening << " Hz";
      EXPECT_LT(std::abs(mean - 1), 3.29 * deviation / std::sqrt(kDraws))
          << points << " points, " << broadening << " Hz";
    }
  }
}

TEST(Scatter, RealBinsCountOneQuadrature) {
  constexpr int kDraws = 300;
  int inside = 0;
  Noise noise(45);
  for (int draw = 0; draw < kDraws; ++draw) {
    Scatter scatter;
    Points sum(400);
    for (int k = 1; k <= 3; ++k) {
      for (Complex& bin : sum) bin += 2 * noise.Next();
      scatter.Add(sum, k, 2, false, 1);
    }
    const NoiseEstimate estimate = scatter.Estimate(false, 1, 400);
    inside += std::abs(estimate.per_scan / 2 - 1) < 1.96 * estimate.relative_deviation ? 1 : 0;
  }
  EXPECT_GE(inside, FewestHits(kDraws, 0.95));
  EXPECT_LE(inside, MostHits(kDraws, 0.95));
}

TEST(Scatter, TellsTheNoiseOfTheLatestIncrementAlone) {
  // Noise of 1 per scan for 40 scans under a strong line, then of 1.5.
  constexpr std::size_t kBins = 8192;
  const Complex line(5000, -300);
  for (const double m : {2.0, 40.0}) {
    Noise noise(46);
    Scatter scatter;
    Points sum(kBins);
    const auto add = [&](double scans, double rms) {
      for (Complex& bin : sum) bin += scans * line + noise.NextComplex(rms * std::sqrt(scans));
      return scatter.Add(sum, scatter.scans() + scans, 1, true, 1);
    };
    EXPECT_EQ(add(20, 1), 0) << "nothing to compare the first one with";
    const double sure = RelativeDeviationOfMedian(2, kBins);
    EXPECT_NEAR(add(20, 1), 1, 3.29 * 2 * sure);
    // The median is of noise mixed from both sides, n s^2 + m over n + m; what
    // is taken off again leaves a deviation larger by (n s^2 + m) / (n s^2).
    const double n = 40;
    const double wider = (n * 2.25 + m) / (n * 2.25);
    EXPECT_NEAR(add(m, 1.5), 1.5, 3.29 * 1.5 * wider * sure) << m << " scans";
  }
}

TEST(Scatter, RestoredItGoesOnAsBefore) {
  const Series series(64, {4, 1, 7, 2}, 47, Complex(3, 1), {5});
  Scatter scatter;
  for (std::size_t k = 0; k < 3; ++k) {
    scatter.Add(series.accumulations[k], series.totals[k], 1, true, 1);
  }
  Scatter restored;
  EXPECT_TRUE(restored.empty());
  restored.Restore(scatter.sum(), scatter.values(), scatter.scans(), scatter.increments());
  EXPECT_EQ(restored.Add(series.accumulations[3], 14, 1, true, 1),
            scatter.Add(series.accumulations[3], 14, 1, true, 1));
  EXPECT_EQ(restored.values(), scatter.values());
  EXPECT_EQ(restored.Estimate(true, 1, 64).per_scan, scatter.Estimate(true, 1, 64).per_scan);
}

}  // namespace
}  // namespace lastscan::engine
