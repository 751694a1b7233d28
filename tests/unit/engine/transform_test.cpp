// The transform against sums written out by their definition, and the axis
// against where lines must come to lie.
#include "engine/spectrum/transform.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <numbers>

#include "engine/spectrum/samples.h"
#include "unit/engine/limits.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

constexpr double kPi = std::numbers::pi;
constexpr double kWidth = 2000;  // of PlainSnapshot, Hz

std::size_t HighestBin(const Points& spectrum) {
  const auto higher = [](const Complex& a, const Complex& b) { return std::abs(a) < std::abs(b); };
  return static_cast<std::size_t>(std::max_element(spectrum.begin(), spectrum.end(), higher) -
                                  spectrum.begin());
}

TEST(Transform, ADampedExponentialHasTheHeightOfItsGeometricSeries) {
  // sum over t of exp(-(rate + weight) t) on the line's own bin, less half the
  // first point.
  for (const std::uint32_t points : {256u, 1000u, 1024u}) {
    for (const double broadening : {0.0, 1.5}) {
      const Transform transform(PlainSnapshot(points), broadening);
      const auto bins = static_cast<double>(transform.axis().bins);
      const double cycles = 37 / bins;  // on a bin
      const double rate = kPi * 3.0 / kWidth;
      Points fid(points);
      AddLine(fid, std::polar(5.0, 0.3), cycles, rate);
      const Points spectrum = transform.Apply(fid);
      const double step = rate + kPi * broadening / kWidth;
      const double series = std::expm1(-step * points) / std::expm1(-step) - 0.5;
      const Complex expected = std::polar(5.0 * series, 0.3);
      const auto bin = static_cast<std::size_t>(transform.axis().bins / 2 + 37);
      EXPECT_LT(std::abs(spectrum[bin] - expected), 1e-9 * std::abs(expected))
          << points << " points, broadened by " << broadening << " Hz";
      EXPECT_EQ(HighestBin(spectrum), bin);
    }
  }
}

TEST(Transform, FillsToThePowerOfTwoThatIsAtLeastTwiceThePoints) {
  for (const auto& [points, bins] :
       {std::pair(64u, 128), std::pair(65u, 256), std::pair(1000u, 2048), std::pair(1024u, 2048)}) {
    const Transform transform(PlainSnapshot(points), 1);
    EXPECT_EQ(transform.axis().bins, bins) << points;
    EXPECT_DOUBLE_EQ(transform.fill_ratio(), static_cast<double>(points) / bins);
    EXPECT_DOUBLE_EQ(transform.axis().hz_per_bin, kWidth / bins);
    EXPECT_DOUBLE_EQ(transform.acquisition_seconds(), points / kWidth);
    EXPECT_EQ(transform.Apply(Points(points, 1.0)).size(), static_cast<std::size_t>(bins));
  }
}

TEST(Transform, APositiveFrequencyIsAHigherShift) {
  // 300 Hz above the centre at 100 MHz is 3 ppm above the shift at the centre.
  Points fid(1024);
  AddLine(fid, 1, 300 / kWidth, kPi * 2 / kWidth);
  v1::Snapshot snapshot = PlainSnapshot(1024);
  const std::string frame = FrameOf(fid);
  for (const bool reversed : {false, true}) {
    snapshot.set_reversed(reversed);
    const Transform transform(snapshot, 1);
    const Points spectrum = transform.Apply(SummedSamples(snapshot, frame));
    const double shift = transform.axis().PpmAt(static_cast<double>(HighestBin(spectrum)));
    EXPECT_NEAR(shift, reversed ? 97.0 : 103.0, 0.51 * transform.axis().ppm_per_bin());
  }
}

TEST(Transform, TheShiftAtTheCentreLiesAtFrequencyZero) {
  const Transform transform(PlainSnapshot(1024), 0);
  const Points spectrum = transform.Apply(Points(1024, 1.0));
  const std::size_t bin = HighestBin(spectrum);
  EXPECT_NEAR(transform.axis().PpmAt(static_cast<double>(bin)), 100, 1e-12);
  EXPECT_NEAR(transform.axis().BinAt(100), static_cast<double>(bin), 1e-9);
}

TEST(Transform, BinsOfARangeLieInsideItAndInsideTheSpectrum) {
  const Axis axis = Transform(PlainSnapshot(64), 0).axis();  // 128 bins, 0.15625 ppm each
  const BinRange bins = axis.BinsOf(ShiftsFrom(99, 101));
  EXPECT_GE(axis.PpmAt(static_cast<double>(bins.first)), 99);
  EXPECT_LT(axis.PpmAt(static_cast<double>(bins.first - 1)), 99);
  EXPECT_LE(axis.PpmAt(static_cast<double>(bins.last)), 101);
  EXPECT_GT(axis.PpmAt(static_cast<double>(bins.last + 1)), 101);
  EXPECT_EQ(axis.BinsOf(ShiftsFrom(0, 500)).first, 0);
  EXPECT_EQ(axis.BinsOf(ShiftsFrom(0, 500)).last, 127);
  EXPECT_TRUE(axis.BinsOf(ShiftsFrom(500, 600)).empty());
  EXPECT_TRUE(axis.BinsOf(ShiftsFrom(0, 10)).empty());
}

TEST(Transform, IsLinear) {
  Noise noise(5);
  Points a(500);
  Points b(500);
  noise.AddTo(a, 3);
  noise.AddTo(b, 0.2);
  Points both(500);
  for (std::size_t t = 0; t < both.size(); ++t) both[t] = a[t] - 7.0 * b[t];
  const Transform transform(PlainSnapshot(500), 2);
  const Points of_a = transform.Apply(a);
  const Points of_b = transform.Apply(b);
  const Points of_both = transform.Apply(both);
  for (std::size_t j = 0; j < of_a.size(); ++j) {
    ASSERT_LT(std::abs(of_both[j] - (of_a[j] - 7.0 * of_b[j])), 1e-10) << "bin " << j;
  }
}

TEST(Transform, NoiseGainAndIndependentBinsAreTheSumsOfTheWeights) {
  for (const double broadening : {0.0, 0.3, 2.0, 40.0}) {
    const Transform transform(PlainSnapshot(1000), broadening);
    double second = 0;
    double fourth = 0;
    for (int t = 0; t < 1000; ++t) {
      const double weight = std::exp(-kPi * broadening * t / kWidth);
      second += std::pow(weight, 2);
      fourth += std::pow(weight, 4);
    }
    EXPECT_NEAR(transform.noise_gain(), std::sqrt(second), 1e-9 * std::sqrt(second));
    EXPECT_NEAR(transform.independent_bins(), second * second / fourth, 1e-6);
  }
}

TEST(Transform, NoiseOfABinIsTheGainTimesTheNoiseOfAPoint) {
  // One bin of each of many draws: independent, so the sum of squares is
  // chi-square. The halved first point takes 3/4 of one point's noise power off.
  constexpr int kDraws = 2000;
  const Transform transform(PlainSnapshot(200), 5);
  Noise noise(6);
  double squares = 0;
  for (int draw = 0; draw < kDraws; ++draw) {
    Points fid(200);
    noise.AddTo(fid, 4);
    squares += std::norm(transform.Apply(fid)[100]);
  }
  const double variance =
      16 * (transform.noise_gain() * transform.noise_gain() - 0.75);  // per quadrature
  EXPECT_GT(squares / variance, LowestChiSquare(2 * kDraws));
  EXPECT_LT(squares / variance, HighestChiSquare(2 * kDraws));
}

TEST(Transform, IndependentBinsAreTheDegreesOfFreedomOfAVariance) {
  // The mean power over all bins has the relative variance 1 / independent bins.
  constexpr int kDraws = 1000;
  const Transform transform(PlainSnapshot(300), 8);
  Noise noise(7);
  double squares = 0;
  double mean_power = 0;
  std::vector<double> powers;
  for (int draw = 0; draw < kDraws; ++draw) {
    Points fid(300);
    noise.AddTo(fid, 1);
    double power = 0;
    for (const Complex& bin : transform.Apply(fid)) power += std::norm(bin);
    powers.push_back(power);
    mean_power += power / kDraws;
  }
  for (const double power : powers) squares += std::pow(power / mean_power - 1, 2);
  // A normal mean of so many: its sample variance is near chi-square.
  const double scaled = squares * transform.independent_bins();
  EXPECT_GT(scaled, LowestChiSquare(kDraws - 1));
  EXPECT_LT(scaled, HighestChiSquare(kDraws - 1));
}

TEST(Transform, ASpectrumPassesThrough) {
  v1::Snapshot snapshot = PlainSnapshot(101);
  snapshot.set_domain(v1::SPECTRUM);
  const Transform transform(snapshot, 3);
  EXPECT_FALSE(transform.complex());
  Points bins(101);
  for (std::size_t j = 0; j < bins.size(); ++j) bins[j] = static_cast<double>(j * j);
  EXPECT_EQ(transform.Apply(bins), bins);
  EXPECT_EQ(transform.axis().bins, 101);
  EXPECT_DOUBLE_EQ(transform.fill_ratio(), 1);
  EXPECT_DOUBLE_EQ(transform.noise_gain(), 1);
  EXPECT_EQ(transform.acquisition_seconds(), 0);
  // The samples share the spectral width evenly about the shift at the centre.
  EXPECT_NEAR(transform.axis().PpmAt(50), 100, 1e-9);
  EXPECT_NEAR(transform.axis().PpmAt(51) - transform.axis().PpmAt(50), 20.0 / 101, 1e-9);
}

}  // namespace
}  // namespace lastscan::engine
