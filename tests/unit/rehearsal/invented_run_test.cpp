// An invented run must be what it says: heights, noise, build-up and faults are
// checked against sums written out here, and the noise against the limits of
// its exact distribution (Boost.Math).
#include "rehearsal/invented_run.h"

#include <gtest/gtest.h>

#include <boost/math/distributions/chi_squared.hpp>
#include <boost/math/distributions/normal.hpp>
#include <cmath>
#include <complex>
#include <numbers>
#include <string_view>
#include <vector>

#include "engine/spectrum/interpolation.h"
#include "engine/spectrum/samples.h"
#include "engine/spectrum/transform.h"

namespace lastscan::rehearsal {
namespace {

using Complex = std::complex<double>;
constexpr double kPi = std::numbers::pi;

InventedSample SmallSample() {
  InventedSample sample;
  sample.spectral_width_hz = 2000;
  sample.points = 2048;
  return sample;
}

std::string_view Frame(const formats::Recording& recording) {
  return {reinterpret_cast<const char*>(recording.samples.data()), recording.samples.size() * 8};
}

std::vector<Complex> Points(const formats::Recording& recording) {
  std::vector<Complex> points(recording.samples.size() / 2);
  for (std::size_t t = 0; t < points.size(); ++t) {
    points[t] = {recording.samples[2 * t], recording.samples[2 * t + 1]};
  }
  return points;
}

// sum of points[t] exp(-weight_rate t) exp(-2 pi i cycles t), by its definition.
Complex SpectrumAt(const std::vector<Complex>& points, double cycles, double weight_rate,
                   double first_factor) {
  Complex sum = 0;
  for (std::size_t t = 0; t < points.size(); ++t) {
    const auto at = static_cast<double>(t);
    const Complex turned =
        points[t] * std::polar(std::exp(-weight_rate * at), -2 * kPi * cycles * at);
    sum += t == 0 ? first_factor * turned : turned;
  }
  return sum;
}

// sum of the squared weights; the noise of a halved first point is halved too.
double WeightPower(std::size_t points, double weight_rate, double first_factor) {
  double sum = first_factor * first_factor;
  for (std::size_t t = 1; t < points; ++t) {
    sum += std::exp(-2 * weight_rate * static_cast<double>(t));
  }
  return sum;
}

TEST(InventedRun, HeightOverNoiseIsTheTruth) {
  for (const double delay : {0.0, 12.5, 67.98}) {
    InventedSample sample = SmallSample();
    sample.receiver_delay_points = delay;
    sample.broadening_hz = 1.7;
    // So strong that its own noise does not show.
    sample.lines = {{103.3, 1.3, 1e7, 0.4}};
    InventedRun run(sample, 1);
    const auto points = Points(run.AdvanceTo(9));
    const double cycles = 3.3 * sample.observe_frequency_mhz / sample.spectral_width_hz;
    const double rate = kPi * sample.broadening_hz / sample.spectral_width_hz;
    const double first = delay == 0 ? 0.5 : 1;
    const double height = std::abs(SpectrumAt(points, cycles, rate, first)) / std::sqrt(9.0);
    const double noise = sample.noise_rms * std::sqrt(WeightPower(sample.points, rate, first));
    EXPECT_NEAR(height / noise / run.TrueSignalToNoise(0, 9), 1, 5e-4) << "delay " << delay;
    EXPECT_DOUBLE_EQ(run.TrueSignalToNoise(0, 9), 3e7);
  }
}

TEST(InventedRun, EngineReadsTheTruth) {
  for (const double delay : {0.0, 67.98}) {
    InventedSample sample = SmallSample();
    sample.points = 8192;
    sample.receiver_delay_points = delay;
    sample.lines = {{97.21, 1.6, 1e7}};
    InventedRun run(sample, 2);
    const formats::Recording recording = run.AdvanceTo(4);
    const engine::Transform transform(recording.snapshot, sample.broadening_hz);
    const auto spectrum =
        transform.Apply(engine::SummedSamples(recording.snapshot, Frame(recording)));
    const double bin = transform.axis().BinAt(97.21);
    const double height = std::abs(engine::ValueBetweenBins(spectrum, transform.fill_ratio(), bin));
    // Only the height is compared: the noise is that of the truth, whose first
    // point is halved where there is no delay.
    const double rate = kPi * sample.broadening_hz / sample.spectral_width_hz;
    const double first = delay == 0 ? 0.5 : 1;
    const double noise = sample.noise_rms * 2 * std::sqrt(WeightPower(sample.points, rate, first));
    EXPECT_NEAR(height / noise / run.TrueSignalToNoise(0, 4), 1, 1e-4) << "delay " << delay;
  }
}

TEST(InventedRun, NoiseIsWhiteNormalAndGrowsAsTheRoot) {
  InventedSample sample = SmallSample();
  sample.noise_rms = 37;
  InventedRun run(sample, 3);
  const auto first = run.AdvanceTo(5).samples;
  const auto second = run.AdvanceTo(21).samples;
  // Of 4,096 samples: the two increments, their product, and neighbours.
  const auto count = static_cast<double>(first.size());
  double of_first = 0;
  double of_increment = 0;
  double product = 0;
  double neighbours = 0;
  double fourth = 0;
  for (std::size_t i = 0; i < first.size(); ++i) {
    const double a = first[i] / (37 * std::sqrt(5.0));
    const double b = (second[i] - first[i]) / (37 * std::sqrt(16.0));
    of_first += a * a;
    of_increment += b * b;
    product += a * b;
    fourth += b * b * b * b;
    if (i >= 2) neighbours += a * first[i - 2] / (37 * std::sqrt(5.0));
  }
  const boost::math::chi_squared chi(count);
  const double low = quantile(chi, 1e-5);
  const double high = quantile(complement(chi, 1e-5));
  EXPECT_GT(of_first, low);
  EXPECT_LT(of_first, high);
  EXPECT_GT(of_increment, low);
  EXPECT_LT(of_increment, high);
  const double limit = quantile(complement(boost::math::normal(), 1e-5)) * std::sqrt(count);
  EXPECT_LT(std::abs(product), limit);
  EXPECT_LT(std::abs(neighbours), limit);
  // The fourth moment of a normal is 3, of variance 96.
  EXPECT_NEAR(fourth / count, 3, 4.3 * std::sqrt(96 / count));
}

TEST(InventedRun, BuildUpIsSymmetricAboutTheDelay) {
  InventedSample sample = SmallSample();
  sample.receiver_delay_points = 60;
  // Undamped for this purpose and in the middle of the spectrum: a pure step.
  sample.lines = {{100, 1e-9, 1e10}};
  const auto points = Points(InventedRun(sample, 4).AdvanceTo(1));
  const double settled = points[1000].real();
  EXPECT_NEAR(points[60].real() / settled, 0.5, 1e-6);
  for (int apart = 1; apart <= 60; ++apart) {
    const double pair = points[60 + apart].real() + points[60 - apart].real();
    EXPECT_NEAR(pair / settled, 1, 1e-6) << apart;
  }
  // It rings before the step and is nothing long before.
  EXPECT_NEAR(points[0].real() / settled, 0, 1e-6);
  EXPECT_GT(std::abs(points[57].real() / settled), 0.02);
}

TEST(InventedRun, PhaseOfLinesIsLinearInTheDelay) {
  const double delay = 67.98;
  for (const double shift : {91.0, 95.5, 100.3, 104.2, 109.1}) {
    InventedSample sample = SmallSample();
    sample.receiver_delay_points = delay;
    sample.phase_radians = 0.7;
    sample.lines = {{shift, 1.5, 1e7, 0.2}};
    const auto points = Points(InventedRun(sample, 5).AdvanceTo(1));
    const double cycles = (shift - 100) * sample.observe_frequency_mhz / sample.spectral_width_hz;
    const Complex reading = SpectrumAt(points, cycles, 0, 1);
    const Complex without_delay = reading * std::polar(1.0, 2 * kPi * cycles * delay);
    EXPECT_NEAR(std::arg(without_delay), 0.9, 2e-3) << shift;
  }
}

TEST(InventedRun, SameSeedSameRun) {
  InventedSample sample = SmallSample();
  sample.lines = {{101, 1.5, 0.5}};
  const auto samples = [&](std::uint64_t seed) {
    InventedRun run(sample, seed);
    run.AdvanceTo(8);
    return run.AdvanceTo(24).samples;
  };
  EXPECT_EQ(samples(6), samples(6));
  EXPECT_NE(samples(6), samples(7));
}

TEST(InventedRun, SnapshotSaysWhatASpectrometerKnows) {
  InventedSample sample = SmallSample();
  sample.seconds_per_scan = 2.5;
  sample.lock_level = [](std::uint64_t scan) { return scan < 10 ? 0.8 : 0.1; };
  InventedRun run(sample, 8);
  run.set_started_at(1000);
  const v1::Snapshot early = run.AdvanceTo(5).snapshot;
  EXPECT_EQ(early.recorded_at().seconds(), 1012);
  EXPECT_EQ(early.recorded_at().nanos(), 500'000'000);
  EXPECT_EQ(early.scans_done(), 5u);
  EXPECT_EQ(early.points(), 2048u);
  EXPECT_DOUBLE_EQ(early.lock_level(), 0.8);
  EXPECT_FALSE(early.has_receiver_gain_db());
  EXPECT_FALSE(early.has_receiver_delay_points());
  EXPECT_DOUBLE_EQ(run.AdvanceTo(10).snapshot.lock_level(), 0.1);
}

TEST(InventedRun, MeanIsSumOverScansAndRoundingIsOfTheExport) {
  InventedSample sample = SmallSample();
  const auto sum = InventedRun(sample, 9).AdvanceTo(7).samples;
  sample.accumulation = v1::MEAN;
  const auto mean = InventedRun(sample, 9).AdvanceTo(7).samples;
  sample.accumulation = v1::SUM;
  sample.rounded = true;
  const auto rounded = InventedRun(sample, 9).AdvanceTo(7).samples;
  for (std::size_t i = 0; i < sum.size(); i += 111) {
    EXPECT_DOUBLE_EQ(mean[i] * 7, sum[i]);
    EXPECT_EQ(rounded[i], std::round(sum[i]));
  }
}

// -- faults: the signal so strong that noise does not show --------------------

InventedSample LoudSample() {
  InventedSample sample = SmallSample();
  sample.lines = {{102, 1.5, 1e7}};
  return sample;
}

double FirstPoint(InventedSample sample, std::uint64_t before, std::uint64_t scans) {
  InventedRun run(std::move(sample), 10);
  double first = 0;
  if (before > 0) first = run.AdvanceTo(before).samples[0];
  return run.AdvanceTo(scans).samples[0] - first;
}

TEST(InventedRunFaults, AmplitudeAndGainAreExactToTheScan) {
  const double of_scan = FirstPoint(LoudSample(), 0, 1);
  InventedSample sample = LoudSample();
  sample.amplitude = [](std::uint64_t scan) { return scan <= 13 ? 1.0 : 0.25; };
  // Scans 11 to 20: three whole ones, seven quarters.
  EXPECT_NEAR(FirstPoint(sample, 10, 20) / of_scan, 3 + 7 * 0.25, 1e-4);
  sample.gain = [](std::uint64_t scan) { return scan <= 13 ? 1.0 : 2.0; };
  EXPECT_NEAR(FirstPoint(sample, 10, 20) / of_scan, 3 + 7 * 0.5, 1e-4);
}

TEST(InventedRunFaults, DriftMovesAndWidthBroadens) {
  const double hz_of_line = 2 * 100.6;
  const auto height_at = [&](const InventedSample& sample, double hz) {
    InventedRun run(sample, 11);
    return std::abs(SpectrumAt(Points(run.AdvanceTo(100)), hz / sample.spectral_width_hz, 0, 0.5));
  };
  const double sound = height_at(LoudSample(), hz_of_line);
  InventedSample sample = LoudSample();
  sample.drift_hz = [](std::uint64_t) { return 7.0; };
  EXPECT_NEAR(height_at(sample, hz_of_line + 7) / sound, 1, 1e-3);
  EXPECT_LT(height_at(sample, hz_of_line) / sound, 0.2);
  // Half the scans here, half there.
  sample.drift_hz = [](std::uint64_t scan) { return scan <= 50 ? 0.0 : 40.0; };
  EXPECT_NEAR(height_at(sample, hz_of_line) / sound, 0.5, 0.03);
  EXPECT_NEAR(height_at(sample, hz_of_line + 40) / sound, 0.5, 0.03);
  // The height of a Lorentzian of the same area goes as one over the width; the
  // FID lasts 1.02 s, long for both.
  sample.drift_hz = nullptr;
  sample.extra_width_hz = [](std::uint64_t) { return 1.5; };
  EXPECT_NEAR(height_at(sample, hz_of_line) / sound, 0.5, 0.01);
}

TEST(InventedRunFaults, SlowDriftKeepsTheArea) {
  InventedSample sample = LoudSample();
  sample.drift_hz = [](std::uint64_t scan) { return 0.01 * static_cast<double>(scan); };
  // The first point is the integral of the spectrum and knows no position.
  const double sound = FirstPoint(LoudSample(), 0, 1000);
  EXPECT_NEAR(FirstPoint(sample, 0, 1000) / sound, 1, 1e-4);
}

TEST(InventedRunFaults, NoiseFactorScalesTheNoiseOnly) {
  InventedSample sample = SmallSample();
  sample.noise = [](std::uint64_t scan) { return scan <= 2 ? 1.0 : 3.0; };
  const auto samples = InventedRun(sample, 12).AdvanceTo(3).samples;
  double sum = 0;
  // 1 + 1 + 9 single-scan variances.
  for (const double value : samples) sum += value * value / (11 * 1000.0 * 1000.0);
  const boost::math::chi_squared chi(static_cast<double>(samples.size()));
  EXPECT_GT(sum, quantile(chi, 1e-5));
  EXPECT_LT(sum, quantile(complement(chi, 1e-5)));
}

TEST(InventedRunFaults, SpurIsOfItsHeightAndHasNoBuildUp) {
  InventedSample sample = SmallSample();
  sample.receiver_delay_points = 60;
  sample.spur = InventedLine{95, 0.05, 1e7, 0};
  sample.amplitude = [](std::uint64_t) { return 0.0; };
  InventedRun run(sample, 13);
  const auto points = Points(run.AdvanceTo(4));
  EXPECT_NEAR(std::abs(points[0]) / std::abs(points[300]), 1, 0.05);
  const double rate = kPi * sample.broadening_hz / sample.spectral_width_hz;
  const double cycles = -5 * sample.observe_frequency_mhz / sample.spectral_width_hz;
  const double noise = sample.noise_rms * std::sqrt(WeightPower(sample.points, rate, 0.5));
  EXPECT_NEAR(std::abs(SpectrumAt(points, cycles, rate, 0.5)) / noise / 4e7, 1, 1e-3);
}

}  // namespace
}  // namespace lastscan::rehearsal
