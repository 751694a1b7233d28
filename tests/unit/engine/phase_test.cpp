// Phase and receiver delay from lines: the errors of what is recovered must be
// as small as least squares allows, and what lines do not settle must stay open.
#include "engine/spectrum/phase.h"

#include <gtest/gtest.h>

#include <Eigen/Dense>
#include <cmath>
#include <numbers>
#include <numeric>

#include "engine/spectrum/samples.h"
#include "engine/spectrum/transform.h"
#include "formats/recording.h"
#include "rehearsal/invented_run.h"
#include "unit/engine/limits.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

constexpr double kTwoPi = 2 * std::numbers::pi;

Axis LongAxis() {
  Axis axis;
  axis.bins = 32768;
  axis.hz_per_bin = 1;
  axis.observe_frequency_mhz = 100;
  return axis;
}

struct Truth {
  double delay = 0;
  double constant = 0;
};

double PhaseAt(const Truth& truth, double bin) {
  return truth.constant - kTwoPi * truth.delay * (bin - 16384) / 32768;
}

// Lines at `bins` of strength `z` that follow `truth`, with their noise.
std::vector<LinePhase> LinesOf(const Truth& truth, const std::vector<double>& bins,
                               const std::vector<double>& z, Noise& noise) {
  std::vector<LinePhase> lines;
  for (std::size_t i = 0; i < bins.size(); ++i) {
    lines.push_back({bins[i], std::polar(z[i], PhaseAt(truth, bins[i])) + noise.NextComplex()});
  }
  return lines;
}

// Information of the lines about (constant, delay): each phase has variance 1/z^2.
Eigen::Matrix2d Information(const std::vector<double>& bins, const std::vector<double>& z) {
  Eigen::Matrix2d information = Eigen::Matrix2d::Zero();
  for (std::size_t i = 0; i < bins.size(); ++i) {
    const Eigen::Vector2d slope(1, -kTwoPi * (bins[i] - 16384) / 32768);
    information += z[i] * z[i] * slope * slope.transpose();
  }
  return information;
}

TEST(FitPhase, RecoversDelayAndConstantWithTheErrorsOfLeastSquares) {
  const std::vector<double> bins = {4200.3, 9017.8, 16031.1, 20455.6, 29003.9};
  const std::vector<double> z = {20, 45, 30, 25, 50};
  const Eigen::Matrix2d information = Information(bins, z);
  constexpr int kDraws = 400;
  for (const Truth truth : {Truth{0, 0.7}, Truth{67.98, -2.4}, Truth{12.5, 3.1}}) {
    Noise noise(21);
    double squares = 0;
    for (int draw = 0; draw < kDraws; ++draw) {
      const auto model = FitPhase(LongAxis(), LinesOf(truth, bins, z, noise), {}, {});
      ASSERT_TRUE(model) << "delay " << truth.delay << ", draw " << draw;
      const Eigen::Vector2d error(std::remainder(model->constant_radians - truth.constant, kTwoPi),
                                  model->delay_points - truth.delay);
      squares += error.dot(information * error);
    }
    EXPECT_GT(squares, LowestChiSquare(2 * kDraws)) << "delay " << truth.delay;
    EXPECT_LT(squares, HighestChiSquare(2 * kDraws)) << "delay " << truth.delay;
  }
}

TEST(FitPhase, TheModelSaysThePhaseOfEveryBin) {
  Noise noise(22);
  const Truth truth{67.98, 1.1};
  const auto model = FitPhase(
      LongAxis(), LinesOf(truth, {3000, 11000, 17500, 30000}, {60, 60, 60, 60}, noise), {}, 66.0);
  ASSERT_TRUE(model);
  for (const double bin : {0.0, 16384.0, 32767.0}) {
    // 60 is the strength of one line; four of them leave less than 1/60 rad
    // inside their span and less than three times that at its ends.
    EXPECT_LT(std::abs(std::remainder(model->At(bin) - PhaseAt(truth, bin), kTwoPi)), 3.0 / 60);
  }
}

TEST(FitPhase, TwoLinesDoNotSettleADelay) {
  Noise noise(23);
  EXPECT_FALSE(FitPhase(LongAxis(), LinesOf({5, 0}, {9000, 21000}, {50, 50}, noise), {}, {}));
  // A third one that is too weak to say anything does not help.
  EXPECT_FALSE(
      FitPhase(LongAxis(), LinesOf({5, 0}, {9000, 21000, 25000}, {50, 50, 5}, noise), {}, {}));
  EXPECT_FALSE(FitPhase(LongAxis(), {}, {}, {}));
}

TEST(FitPhase, DelaysThatExplainTheLinesAlikeStayOpen) {
  // Evenly spaced by 1/64 of the spectrum: delays 64 points apart look the same.
  const std::vector<double> bins = {15000, 15512, 16024, 17048};
  const std::vector<double> z = {50, 50, 50, 50};
  Noise noise(24);
  const auto lines = LinesOf({40, 0.5}, bins, z, noise);
  EXPECT_FALSE(FitPhase(LongAxis(), lines, {}, {}));
  // The onset of the FID tells them apart.
  const auto model = FitPhase(LongAxis(), lines, {}, 43.0);
  ASSERT_TRUE(model);
  const double deviation = std::sqrt(Information(bins, z).inverse()(1, 1));
  EXPECT_LT(std::abs(model->delay_points - 40), 3.29 * deviation);
}

TEST(FitPhase, LinesWithoutACommonPhaseStayOpen) {
  Noise noise(25);
  int accepted = 0;
  constexpr int kDraws = 300;
  for (int draw = 0; draw < kDraws; ++draw) {
    std::vector<LinePhase> lines;
    for (int i = 0; i < 8; ++i) {
      lines.push_back({noise.Uniform(0, 32768), std::polar(50.0, noise.Uniform(0, kTwoPi))});
    }
    accepted += FitPhase(LongAxis(), lines, {}, {}) ? 1 : 0;
    accepted += FitPhase(LongAxis(), lines, 67.98, {}) ? 1 : 0;
  }
  EXPECT_EQ(accepted, 0);
}

TEST(FitPhase, AGivenDelayLeavesTheConstantToASingleLine) {
  Noise noise(26);
  const Truth truth{67.98, 2.2};
  const auto model = FitPhase(LongAxis(), LinesOf(truth, {30000}, {40}, noise), 67.98, {});
  ASSERT_TRUE(model);
  EXPECT_EQ(model->delay_points, 67.98);
  EXPECT_LT(std::abs(std::remainder(model->constant_radians - truth.constant, kTwoPi)), 3.29 / 40);
}

TEST(FitPhase, AGivenDelayThatTheLinesContradictIsNotTaken) {
  Noise noise(27);
  const auto lines = LinesOf({67.98, 0}, {6000, 14000, 30000}, {40, 40, 40}, noise);
  EXPECT_TRUE(FitPhase(LongAxis(), lines, 67.98, {}));
  EXPECT_FALSE(FitPhase(LongAxis(), lines, 60, {}));
}

TEST(OnsetOfFid, FindsWhereTheSignalSetsIn) {
  for (const double delay : {0.0, 12.5, 67.98, 74.25}) {
    rehearsal::InventedSample sample;
    sample.points = 2048;
    sample.spectral_width_hz = 10000;
    sample.receiver_delay_points = delay;
    sample.phase_radians = 0.9;
    sample.lines = {{77.2, 2, 120}, {128.4, 2, 70}, {31.9, 2, 60}};
    rehearsal::InventedRun run(sample, 28);
    const formats::Recording recording = run.AdvanceTo(16);
    const Points fid = SummedSamples(recording.snapshot, FrameOf(recording.samples));
    const auto onset = OnsetOfFid(fid, sample.noise_rms * 4);
    ASSERT_TRUE(onset) << delay;
    EXPECT_NEAR(*onset, delay, 4) << "good to a few points, and well inside the 12 searched";
  }
}

TEST(OnsetOfFid, IsEmptyWhenNothingStandsOutOfTheNoise) {
  Noise noise(29);
  Points fid(2048);
  noise.AddTo(fid, 3);
  EXPECT_FALSE(OnsetOfFid(fid, 3));
  AddLine(fid, 3, 0.1, 0.001);  // as strong as the noise only
  EXPECT_FALSE(OnsetOfFid(fid, 3));
  EXPECT_FALSE(OnsetOfFid(Points(100, 1e6), 1)) << "too short to look for an onset";
}

TEST(PhaseLeverages, SumToTheTwoParametersOfTheFit) {
  Noise noise(30);
  for (const int count : {2, 3, 7, 30}) {
    std::vector<LinePhase> lines;
    for (int i = 0; i < count; ++i) {
      lines.push_back({noise.Uniform(0, 32768), std::polar(noise.Uniform(8, 60), 0.3)});
    }
    const std::vector<double> leverages = PhaseLeverages(lines);
    ASSERT_EQ(leverages.size(), lines.size());
    EXPECT_NEAR(std::accumulate(leverages.begin(), leverages.end(), 0.0), 2, 1e-5) << count;
    for (const double leverage : leverages) {
      EXPECT_GE(leverage, 0);
      EXPECT_LE(leverage, 1);
    }
  }
}

TEST(PhaseLeverages, ASingleLineIsReadWithItsOwnPhase) {
  EXPECT_TRUE(PhaseLeverages({}).empty());
  const std::vector<LinePhase> one = {{100, 20}};
  EXPECT_EQ(PhaseLeverages(one), std::vector<double>{1.0});
}

TEST(PhaseLeverages, AWeakLineAmongStrongOnesHasHardlyAny) {
  const std::vector<LinePhase> lines = {{2000, 55}, {16000, 9}, {30000, 55}, {24000, 55}};
  const std::vector<double> leverages = PhaseLeverages(lines);
  // Its share of the weight is 81 / (81 + 3 * 3025), near the middle of them all.
  EXPECT_LT(leverages[1], 0.015);
  EXPECT_GT(leverages[0], 0.3);
}

}  // namespace
}  // namespace lastscan::engine
