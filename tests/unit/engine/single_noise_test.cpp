// The noise where there is one snapshot only, and the noise as a lab reads it
// in a window: what lines, feet and base lines may not do to them.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

#include "engine/sensitivity/noise.h"
#include "engine/sensitivity/noise_window.h"
#include "engine/spectrum/transform.h"
#include "unit/engine/limits.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

using ::testing::HasSubstr;

constexpr double kPi = std::numbers::pi;

// Share of draws, and mean, of an estimate whose truth is 1.
struct Score {
  int inside = 0;
  double mean = 0;
  double deviation = 0;
};
template <typename Draw>
Score ScoreOf(int draws, Draw draw) {
  Score score;
  for (int i = 0; i < draws; ++i) {
    const NoiseEstimate estimate = draw();
    EXPECT_FALSE(estimate.from_increments);
    score.inside += std::abs(estimate.per_scan - 1) < 1.96 * estimate.relative_deviation ? 1 : 0;
    score.mean += estimate.per_scan / draws;
    score.deviation = estimate.relative_deviation;
  }
  return score;
}

TEST(NoiseOfFid, IsTheNoiseOfOnePointAndScan) {
  Noise noise(51);
  const Score score = ScoreOf(100, [&] {
    Points fid(4096);
    noise.AddTo(fid, std::sqrt(64.0));
    return NoiseOfFid(fid, 64);
  });
  EXPECT_LT(std::abs(score.mean - 1), 0.03);
  EXPECT_GE(score.inside, FewestHits(100, 0.90));
}

TEST(NoiseOfFid, StrongLinesLeaveItWithinThreePerCent) {
  // Forty lines, the strongest 1e5 times the noise of its bin, cut off before
  // they have decayed.
  Noise noise(52);
  double mean = 0;
  constexpr int kDraws = 20;
  for (int draw = 0; draw < kDraws; ++draw) {
    Points fid(8192);
    noise.AddTo(fid, 1);
    for (int line = 0; line < 40; ++line) {
      const double height = line == 0 ? 1e5 : std::pow(10, noise.Uniform(1, 4));
      AddLine(fid, std::polar(height / std::sqrt(8192.0), noise.Uniform(0, 6)),
              noise.Uniform(-0.5, 0.5), noise.Uniform(2e-4, 2e-3));
    }
    mean += NoiseOfFid(fid, 1).per_scan / kDraws;
  }
  EXPECT_NEAR(mean, 1, 0.03);
}

TEST(NoiseOfFid, PointsThatWereNeverAcquiredDoNotCount) {
  Noise noise(53);
  Points fid(3000);
  noise.AddTo(fid, 2);
  Points filled = fid;
  filled.resize(8192);
  EXPECT_DOUBLE_EQ(NoiseOfFid(filled, 1).per_scan, NoiseOfFid(fid, 1).per_scan);
  EXPECT_EQ(NoiseOfFid(Points(8192), 1).per_scan, 0) << "silence has no noise";
}

TEST(NoiseOfQuietBands, IsTheNoiseOfOneScanInABin) {
  Noise noise(54);
  for (const bool complex : {true, false}) {
    const Score score = ScoreOf(100, [&] {
      Points bins(8192);
      for (Complex& bin : bins) bin = complex ? noise.NextComplex(4) : Complex(4 * noise.Next());
      return NoiseOfQuietBands(bins, 16, complex, 1, 8192);
    });
    EXPECT_LT(std::abs(score.mean - 1), 0.03) << complex;
    EXPECT_GE(score.inside, FewestHits(100, 0.90)) << complex;
  }
}

TEST(NoiseOfQuietBands, AQuarterOfTheSpectrumFreeOfLinesIsEnough) {
  Noise noise(55);
  double mean = 0;
  constexpr int kDraws = 50;
  for (int draw = 0; draw < kDraws; ++draw) {
    Points bins(8192);
    noise.AddTo(bins, 1);
    // Signal everywhere but in the first 30 %.
    for (std::size_t j = 2458; j < bins.size(); ++j) bins[j] += noise.NextComplex(30);
    mean += NoiseOfQuietBands(bins, 1, true, 1, 8192).per_scan / kDraws;
  }
  // Where hardly more than a quarter is quiet, the quartile of all bands is near
  // the highest of the quiet ones: high by up to what 19 normal values reach at
  // most, 1.85 deviations on average, and by the pull of 0.674 taken back.
  const double in_band = RelativeDeviationOfMedian(2, 8192 / 64);
  EXPECT_GT(mean, 1 - 0.674 * in_band);
  EXPECT_LT(mean, 1 + (1.85 + 0.674) * in_band);
}

TEST(NoiseOfQuietBands, BlankedEdgesAreEmptyNotQuiet) {
  Noise noise(56);
  Points bins(8192);
  noise.AddTo(bins, 1);
  for (std::size_t j = 0; j < 2048; ++j) bins[j] = bins[8191 - j] = 0;
  const NoiseEstimate estimate = NoiseOfQuietBands(bins, 1, true, 1, 8192);
  EXPECT_NEAR(estimate.per_scan, 1, 3.29 * estimate.relative_deviation);
}

TEST(NoiseOfQuietBands, ABaseLineUnderARealSpectrumIsNotNoise) {
  Noise noise(57);
  Points bins(8192);
  for (Complex& bin : bins) bin = noise.Next();
  const double plain = NoiseOfQuietBands(bins, 1, false, 1, 8192).per_scan;
  for (Complex& bin : bins) bin += 50;
  EXPECT_NEAR(NoiseOfQuietBands(bins, 1, false, 1, 8192).per_scan, plain, 1e-9);
}

TEST(RmsAboutBaseline, TakesAStraightBaseLineOff) {
  Noise noise(58);
  std::vector<double> plain(200);
  for (double& value : plain) value = 3 * noise.Next();
  std::vector<double> sloping = plain;
  for (std::size_t j = 0; j < sloping.size(); ++j) {
    sloping[j] += 1000 - 7.5 * static_cast<double>(j);
  }
  const BinRange range{20, 179};
  EXPECT_NEAR(RmsAboutBaseline(sloping, range), RmsAboutBaseline(plain, range), 1e-9);
  for (std::size_t j = 0; j < sloping.size(); ++j) sloping[j] -= plain[j];
  EXPECT_NEAR(RmsAboutBaseline(sloping, range), 0, 1e-9);
}

TEST(RmsAboutBaseline, IsTheRmsOfNoise) {
  // Two parameters are fitted, so (count - 2) rms^2 is chi-square.
  constexpr int kDraws = 400;
  Noise noise(59);
  double squares = 0;
  for (int draw = 0; draw < kDraws; ++draw) {
    std::vector<double> values(12);
    for (double& value : values) value = 5 * noise.Next();
    squares += 10 * std::pow(RmsAboutBaseline(values, {0, 11}) / 5, 2);
  }
  EXPECT_GT(squares, LowestChiSquare(10 * kDraws));
  EXPECT_LT(squares, HighestChiSquare(10 * kDraws));
}

TEST(NoiseWindow, MustLieInsideTheSpectrumAndHoldFivePoints) {
  const Transform transform(PlainSnapshot(1000), 1);  // 90 to 110 ppm
  EXPECT_THAT(RefusalOf([&] { NoiseWindowBins(ShiftsFrom(80, 95), transform); }),
              HasSubstr("noise window 80 to 95 ppm reaches outside the spectrum, which covers 90"));
  EXPECT_THAT(RefusalOf([&] { NoiseWindowBins(ShiftsFrom(105, 111), transform); }),
              HasSubstr("mend the window or the shift at the centre"));
  EXPECT_THAT(RefusalOf([&] { NoiseWindowBins(ShiftsFrom(100, 100.05), transform); }),
              HasSubstr("fewer than five independent points: widen it"));
  const BinRange bins = NoiseWindowBins(ShiftsFrom(92, 97), transform);
  EXPECT_NEAR(transform.axis().PpmAt(static_cast<double>(bins.first)), 92, 0.01);
  EXPECT_NEAR(transform.axis().PpmAt(static_cast<double>(bins.last)), 97, 0.01);
}

TEST(NoiseWindow, ReadsOneOnNoiseAsSurelyAsItSays) {
  constexpr int kDraws = 400;
  const Transform transform(PlainSnapshot(1024), 0);
  const BinRange window = NoiseWindowBins(ShiftsFrom(92, 97), transform);
  Noise noise(60);
  int inside = 0;
  for (int draw = 0; draw < kDraws; ++draw) {
    Points fid(1024);
    noise.AddTo(fid, 2);
    const NoiseWindowReading reading =
        ReadNoiseWindow(transform.Apply(fid), window, transform, 2 * transform.noise_gain());
    EXPECT_NEAR(reading.points, 256, 1);
    inside += std::abs(reading.excess - 1) < 1.96 * reading.relative_deviation ? 1 : 0;
  }
  EXPECT_GE(inside, FewestHits(kDraws, 0.95));
  EXPECT_LE(inside, MostHits(kDraws, 0.95));
}

TEST(NoiseWindow, StructureReadsAboveOne) {
  const Transform transform(PlainSnapshot(1024), 0);
  const BinRange window = NoiseWindowBins(ShiftsFrom(92, 97), transform);
  Noise noise(61);
  Points fid(1024);
  noise.AddTo(fid, 1);
  AddLine(fid, 10, -0.27, kPi * 40 / 2000);  // a broad hump inside the window
  const NoiseWindowReading reading =
      ReadNoiseWindow(transform.Apply(fid), window, transform, transform.noise_gain());
  EXPECT_GT(reading.excess, 1 + 5 * reading.relative_deviation);
}

}  // namespace
}  // namespace lastscan::engine
