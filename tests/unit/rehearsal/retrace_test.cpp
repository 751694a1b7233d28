// The noise under strong lines must be measured right, and a retraced run must
// be distributed as a running one: increments of the right variance, ending in
// the finished data exactly.
#include "rehearsal/retrace.h"

#include <gtest/gtest.h>

#include <boost/math/distributions/chi_squared.hpp>
#include <boost/math/distributions/normal.hpp>
#include <cmath>
#include <complex>
#include <numbers>
#include <random>
#include <string>
#include <string_view>
#include <vector>

#include "engine/spectrum/samples.h"
#include "engine/spectrum/transform.h"
#include "rehearsal/invented_run.h"
#include "rehearsal/scenarios.h"

namespace lastscan::rehearsal {
namespace {

constexpr std::uint64_t kScans = 400;

// Lines from a hundred to a million times the noise, solvent included.
InventedSample CarbonSample(double loudness) {
  InventedSample sample = FindScenario("on-course")->sample;
  sample.rounded = false;
  for (InventedLine& line : sample.lines) line.signal_to_noise_per_scan *= loudness;
  return sample;
}

// A proton FID: 60 lines over 8 ppm, one of them a solvent of great strength.
InventedSample ProtonSample(double delay) {
  InventedSample sample;
  sample.nucleus = "1H";
  sample.observe_frequency_mhz = 400.1;
  sample.spectral_width_hz = 8000;
  sample.points = 8192;
  sample.centre_shift_ppm = 5;
  sample.receiver_delay_points = delay;
  sample.broadening_hz = 0.3;
  for (int i = 0; i < 60; ++i) {
    const double shift = 0.8 + 0.117 * i + 0.02 * ((i * 7) % 5);
    sample.lines.push_back({shift, 0.8 + 0.1 * (i % 9), 20.0 + 15 * (i % 11)});
  }
  sample.lines.push_back({4.79, 2.5, 20000});
  return sample;
}

// Mean over `runs` of measured over true rms, and the largest miss of one.
struct Ratio {
  double mean = 0;
  double largest_miss = 0;
};
Ratio MeasuredOverTrue(const InventedSample& sample, int runs) {
  Ratio ratio;
  for (int i = 0; i < runs; ++i) {
    const auto finished = InventedRun(sample, 100 + i).AdvanceTo(kScans);
    const double one = MeasureNoise(finished).rms / (sample.noise_rms * std::sqrt(1.0 * kScans));
    ratio.mean += one / runs;
    ratio.largest_miss = std::max(ratio.largest_miss, std::abs(one - 1));
  }
  return ratio;
}

TEST(MeasureNoise, RightWithinThreePercentUnderStrongLines) {
  for (const double loudness : {0.0, 1.0, 100.0, 10000.0}) {
    const Ratio ratio = MeasuredOverTrue(CarbonSample(loudness), 6);
    EXPECT_LT(ratio.largest_miss, 0.03) << "13C, lines times " << loudness;
    EXPECT_NEAR(ratio.mean, 1, 0.01) << "13C, lines times " << loudness;
  }
  for (const double delay : {0.0, 67.98}) {
    const Ratio ratio = MeasuredOverTrue(ProtonSample(delay), 6);
    EXPECT_LT(ratio.largest_miss, 0.03) << "1H, delay " << delay;
    EXPECT_NEAR(ratio.mean, 1, 0.015) << "1H, delay " << delay;
  }
}

TEST(MeasureNoise, SmallFidsToo) {
  InventedSample sample = StudySample(5);
  const Ratio ratio = MeasuredOverTrue(sample, 40);
  EXPECT_NEAR(ratio.mean, 1, 0.03);
}

TEST(MeasureNoise, MeanHasTheNoiseOfTheMean) {
  InventedSample sample = CarbonSample(1);
  const double of_sum = MeasureNoise(InventedRun(sample, 5).AdvanceTo(kScans)).rms;
  sample.accumulation = v1::MEAN;
  const double of_mean = MeasureNoise(InventedRun(sample, 5).AdvanceTo(kScans)).rms;
  EXPECT_NEAR(of_mean * kScans / of_sum, 1, 1e-9);
}

TEST(MeasureNoise, FilledZerosAreNotQuietNoise) {
  auto finished = InventedRun(CarbonSample(1), 6).AdvanceTo(kScans);
  const double before = MeasureNoise(finished).rms;
  finished.samples.resize(2 * finished.samples.size(), 0.0);
  finished.snapshot.set_points(2 * finished.snapshot.points());
  const MeasuredNoise noise = MeasureNoise(finished);
  EXPECT_EQ(noise.filled_points, finished.snapshot.points() / 2);
  EXPECT_NEAR(noise.rms / before, 1, 1e-9);
  const auto early = Retrace(finished, 1).AdvanceTo(10).samples;
  EXPECT_NE(early[early.size() / 2 - 1], 0);
  EXPECT_EQ(early[early.size() / 2], 0);
  EXPECT_EQ(early.back(), 0);
}

TEST(MeasureNoise, RefusesWhatCannotBeMeasured) {
  formats::Recording recording = InventedRun(CarbonSample(1), 20).AdvanceTo(4);
  recording.samples[2001] = NAN;
  const auto refusal = [](const formats::Recording& finished) -> std::string {
    try {
      MeasureNoise(finished);
    } catch (const formats::Unreadable& unreadable) {
      return unreadable.what();
    }
    return "";
  };
  EXPECT_NE(refusal(recording).find("point 1000 "), std::string::npos) << refusal(recording);
  recording.samples.assign(2 * 63, 1.0);
  EXPECT_NE(refusal(recording).find("63 points"), std::string::npos) << refusal(recording);
  // The smallest there can be, of either kind, and silence.
  recording.samples.assign(2 * 64, 0.0);
  EXPECT_EQ(MeasureNoise(recording).rms, 0);
  recording.snapshot.set_domain(v1::SPECTRUM);
  recording.samples.assign(64, 0.0);
  EXPECT_EQ(MeasureNoise(recording).rms, 0);
  std::mt19937_64 random(21);
  for (double& value : recording.samples) value = std::normal_distribution<double>(0, 3)(random);
  EXPECT_NEAR(MeasureNoise(recording).rms, 3, 1);
}

// Noise that a symmetric filter has cut beyond `edge` (cycles per point).
formats::Recording Filtered(double edge, std::uint64_t seed) {
  MeasuredNoise white;
  white.rms = 1;
  for (int i = 0; i < MeasuredNoise::kBands; ++i) {
    const double cycles = (i + 0.5) / MeasuredNoise::kBands - 0.5;
    white.passband.push_back(std::abs(cycles) < edge ? 1 : 0.04);
  }
  std::mt19937_64 random(seed);
  formats::Recording recording;
  recording.snapshot.set_domain(v1::FID);
  recording.snapshot.set_points(16384);
  recording.snapshot.set_scans_done(100);
  recording.samples = DrawNoise(white, 32768, random);
  return recording;
}

TEST(MeasureNoise, PassbandIsMeasuredAndDrawn) {
  // 0.4375 is a border of bands: the outer 4 on each side are cut.
  const formats::Recording recording = Filtered(0.4375, 7);
  const MeasuredNoise noise = MeasureNoise(recording);
  for (int i = 0; i < MeasuredNoise::kBands; ++i) {
    const bool inside = i >= 4 && i < 60;
    const bool border = i == 3 || i == 4 || i == 59 || i == 60;
    if (border) continue;  // drawn with a slope there
    if (inside) {
      EXPECT_NEAR(noise.passband[i], 1, 0.4) << i;
    } else {
      EXPECT_NEAR(noise.passband[i], 0.04, 0.02) << i;
    }
  }
  double energy = 0;
  for (const double value : recording.samples) energy += value * value;
  const double rms = std::sqrt(energy / static_cast<double>(recording.samples.size()));
  EXPECT_NEAR(rms, 1, 0.02);
  EXPECT_NEAR(noise.rms / rms, 1, 0.03);
}

// -- spectra ------------------------------------------------------------------

// The phased spectrum of an invented run, real values by rising shift.
formats::Recording SpectrumOf(InventedSample sample, std::uint64_t seed) {
  sample.receiver_delay_points = 0;
  sample.phase_radians = 0;
  const auto fid = InventedRun(sample, seed).AdvanceTo(kScans);
  const engine::Transform transform(fid.snapshot, sample.broadening_hz);
  const std::string_view frame(reinterpret_cast<const char*>(fid.samples.data()),
                               fid.samples.size() * sizeof(double));
  formats::Recording recording = fid;
  recording.samples.clear();
  for (const auto& bin : transform.Apply(engine::SummedSamples(fid.snapshot, frame))) {
    recording.samples.push_back(bin.real());
  }
  recording.snapshot.set_domain(v1::SPECTRUM);
  recording.snapshot.set_reversed(true);
  recording.snapshot.set_points(static_cast<std::uint32_t>(recording.samples.size()));
  return recording;
}

// Exactly: the noise of a bin, and the correlation of bins `apart`, from the
// weights w of the points: sum w^2 cos(2 pi apart t / bins) / sum w^2.
double TrueRms(const InventedSample& sample) {
  double power = 0;
  for (std::uint32_t t = 0; t < sample.points; ++t) {
    power += std::exp(-2 * std::numbers::pi * sample.broadening_hz * t / sample.spectral_width_hz);
  }
  return sample.noise_rms * std::sqrt(power * kScans);
}
double TrueCorrelation(const InventedSample& sample, std::size_t bins, int apart) {
  double power = 0;
  double sum = 0;
  for (std::uint32_t t = 0; t < sample.points; ++t) {
    const double weight =
        std::exp(-2 * std::numbers::pi * sample.broadening_hz * t / sample.spectral_width_hz);
    power += weight;
    sum += weight * std::cos(2 * std::numbers::pi * apart * t / static_cast<double>(bins));
  }
  return sum / power;
}

TEST(MeasureNoiseOfSpectrum, RightWithinThreePercentUnderStrongLines) {
  for (const double loudness : {0.0, 1.0, 10.0}) {
    const InventedSample sample = CarbonSample(loudness);
    double mean = 0;
    for (int i = 0; i < 6; ++i) {
      const double ratio = MeasureNoise(SpectrumOf(sample, 200 + i)).rms / TrueRms(sample);
      EXPECT_NEAR(ratio, 1, 0.03) << "lines times " << loudness;
      mean += ratio / 6;
    }
    EXPECT_NEAR(mean, 1, 0.015) << "lines times " << loudness;
  }
}

// Broadened by some line widths, few points of a stretch are independent.
TEST(MeasureNoiseOfSpectrum, RightWithinThreePercentUnderMuchBroadening) {
  for (const double broadening : {2.0, 3.5}) {
    InventedSample sample = CarbonSample(1);
    sample.broadening_hz = broadening;
    double mean = 0;
    for (int i = 0; i < 6; ++i) {
      const double ratio = MeasureNoise(SpectrumOf(sample, 400 + i)).rms / TrueRms(sample);
      EXPECT_NEAR(ratio, 1, 0.05) << broadening << " Hz";
      mean += ratio / 6;
    }
    EXPECT_NEAR(mean, 1, 0.03) << broadening << " Hz";
  }
}

// A narrow line is cut off at the end of the FID: its ripple is all over the
// spectrum and as high as the noise or higher far from the line.
TEST(MeasureNoiseOfSpectrum, RippleOfACutOffLineIsNoNoise) {
  InventedSample sample = CarbonSample(0);
  sample.broadening_hz = 0.3;
  sample.lines = {{128, 0.05, 600}, {77, 0.05, 1000}};
  double mean = 0;
  for (int i = 0; i < 6; ++i) {
    const double ratio = MeasureNoise(SpectrumOf(sample, 300 + i)).rms / TrueRms(sample);
    EXPECT_NEAR(ratio, 1, 0.03);
    mean += ratio / 6;
  }
  EXPECT_NEAR(mean, 1, 0.015);
}

TEST(MeasureNoiseOfSpectrum, DrawnNeighboursAreAsAlikeAsMeasuredOnes) {
  const InventedSample sample = CarbonSample(1);
  const formats::Recording finished = SpectrumOf(sample, 9);
  const MeasuredNoise noise = MeasureNoise(finished);
  std::mt19937_64 random(10);
  const auto drawn = DrawNoise(noise, finished.samples.size(), random);
  double power = 0;
  for (const double value : drawn) power += value * value;
  for (const int apart : {1, 2, 3, 5, 8}) {
    double sum = 0;
    for (std::size_t i = apart; i < drawn.size(); ++i) sum += drawn[i] * drawn[i - apart];
    EXPECT_NEAR(sum / power, TrueCorrelation(sample, drawn.size(), apart), 0.03) << apart;
  }
}

// -- retracing ----------------------------------------------------------------

TEST(Retrace, EndsInTheFinishedRecordingSampleForSample) {
  for (const v1::Accumulation accumulation : {v1::SUM, v1::MEAN}) {
    InventedSample sample = CarbonSample(1);
    sample.accumulation = accumulation;
    const auto finished = InventedRun(sample, 11).AdvanceTo(kScans);
    Retrace retrace(finished, 12);
    const auto early = retrace.AdvanceTo(100);
    EXPECT_EQ(early.snapshot.scans_done(), 100u);
    EXPECT_NE(early.samples, finished.samples);
    const auto last = retrace.AdvanceTo(kScans);
    EXPECT_EQ(last.samples, finished.samples);
    EXPECT_EQ(last.snapshot.scans_done(), kScans);
  }
}

TEST(Retrace, SameSeedSameLooks) {
  const auto finished = InventedRun(StudySample(5), 13).AdvanceTo(kScans);
  EXPECT_EQ(Retrace(finished, 1).AdvanceTo(9).samples, Retrace(finished, 1).AdvanceTo(9).samples);
  EXPECT_NE(Retrace(finished, 1).AdvanceTo(9).samples, Retrace(finished, 2).AdvanceTo(9).samples);
}

// The increments of a bridge D_k over m_k of N scans: of sum |D_k|^2/m_k - |F|^2/N
// each sample has sigma^2 chi-square with K-1 degrees of freedom. In the FID's
// own units, sigma the measured noise of one scan.
TEST(Retrace, IncrementsScatterAsTheMeasuredNoise) {
  const InventedSample sample = CarbonSample(1);
  const auto finished = InventedRun(sample, 14).AdvanceTo(kScans);
  Retrace retrace(finished, 15);
  const std::vector<std::uint64_t> looks = {1, 3, 10, 50, 51, 200, 390, kScans};
  std::vector<double> before(finished.samples.size(), 0);
  std::uint64_t scans_before = 0;
  double scatter = 0;
  for (const std::uint64_t look : looks) {
    const auto now = retrace.AdvanceTo(look).samples;
    for (std::size_t i = 0; i < now.size(); ++i) {
      const double increment = now[i] - before[i];
      scatter += increment * increment / static_cast<double>(look - scans_before);
    }
    before = now;
    scans_before = look;
  }
  for (const double value : finished.samples) scatter -= value * value / kScans;
  const double one_scan = retrace.noise().rms / std::sqrt(1.0 * kScans);
  const auto degrees = static_cast<double>(finished.samples.size() * (looks.size() - 1));
  const boost::math::chi_squared chi(degrees);
  EXPECT_GT(scatter / (one_scan * one_scan), quantile(chi, 1e-5));
  EXPECT_LT(scatter / (one_scan * one_scan), quantile(complement(chi, 1e-5)));
}

// A partial sum less its signal is (n/N) F(N) + b(n): of true variance
// n^2/N sigma^2 and, from the measured level, n(N-n)/N sigma'^2; together
// n sigma^2 when they agree. Later increments know nothing of earlier ones.
TEST(Retrace, PartialSumsHaveTheNoiseOfARunningOne) {
  const InventedSample sample = CarbonSample(0);
  const auto finished = InventedRun(sample, 16).AdvanceTo(kScans);
  Retrace retrace(finished, 17);
  const double variance = sample.noise_rms * sample.noise_rms;
  const double measured = retrace.noise().rms * retrace.noise().rms / kScans;
  const auto count = static_cast<double>(finished.samples.size());
  constexpr double kLimit = 4.3;  // standard deviations, 1 in 50,000
  std::vector<double> at_70;
  for (const std::uint64_t look : {20u, 70u, 300u}) {
    const auto now = retrace.AdvanceTo(look).samples;
    const double share = static_cast<double>(look) / kScans;
    double energy = 0;
    for (const double value : now) energy += value * value;
    const double expected = static_cast<double>(look) * (share * variance + (1 - share) * measured);
    EXPECT_NEAR(energy / count / expected, 1, kLimit * std::sqrt(2 / count)) << look;
    if (look == 70) at_70 = now;
    if (look != 300) continue;
    double product = 0;
    for (std::size_t i = 0; i < now.size(); ++i) product += at_70[i] * (now[i] - at_70[i]);
    const double left = 70.0 * 230.0 / kScans * (variance - measured);
    const double deviation = variance * std::sqrt(70.0 * 230.0 / count);
    EXPECT_NEAR(product / count, left, kLimit * deviation);
  }
}

TEST(Retrace, MeanAndSumAreTheSameRun) {
  InventedSample sample = CarbonSample(1);
  const auto of_sum = InventedRun(sample, 18).AdvanceTo(kScans);
  sample.accumulation = v1::MEAN;
  const auto of_mean = InventedRun(sample, 18).AdvanceTo(kScans);
  const auto sum = Retrace(of_sum, 19).AdvanceTo(25).samples;
  const auto mean = Retrace(of_mean, 19).AdvanceTo(25).samples;
  for (std::size_t i = 0; i < sum.size(); i += 997) {
    EXPECT_NEAR(mean[i] * 25, sum[i], 1e-6 * std::abs(sum[i])) << i;
  }
}

TEST(EvenLooks, AreRisingEvenAndEndAtTheTotal) {
  EXPECT_EQ(EvenLooks(1024, 4), (std::vector<std::uint64_t>{256, 512, 768, 1024}));
  EXPECT_EQ(EvenLooks(10, 3), (std::vector<std::uint64_t>{4, 7, 10}));
  EXPECT_EQ(EvenLooks(3, 32), (std::vector<std::uint64_t>{1, 2, 3}));
  EXPECT_EQ(EvenLooks(~std::uint64_t{0}, 7).back(), ~std::uint64_t{0});
}

}  // namespace
}  // namespace lastscan::rehearsal
