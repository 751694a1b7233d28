// The root law on real noise: the bins between the lines of a real FID, dealt
// out as increments of a run, must grow with the root of the scans, and no
// longer do so once something coherent is added to each. Dealt out anew and anew,
// the exponent's 95 % limits must hold 0.5 as often as they say.
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <cstdlib>
#include <cstring>
#include <numbers>
#include <random>
#include <string>
#include <vector>

#include "engine/run.h"
#include "engine/spectrum/transform.h"
#include "formats/recording.h"

namespace lastscan::engine {
namespace {

constexpr std::size_t kIncrements = 32;

// Independent real values of the noise between the lines of an FID. A weight of
// sin^4 leaves lines no feet; bins near loud ones are left out, and of the rest
// every third is independent of the one before it.
std::vector<double> NoiseBetweenLines(const std::string& path) {
  const formats::Recording recording = formats::ReadRecording(path);
  const std::size_t points = recording.snapshot.points();
  std::vector<std::complex<double>> fid(points);
  for (std::size_t t = 0; t < points; ++t) {
    const double sine =
        std::sin(std::numbers::pi * (static_cast<double>(t) + 0.5) / static_cast<double>(points));
    fid[t] = std::pow(sine, 4) *
             std::complex<double>(recording.samples[2 * t], recording.samples[2 * t + 1]);
  }
  const Transform transform(recording.snapshot, 0);
  const std::vector<std::complex<double>> spectrum = transform.Apply(std::move(fid));
  const auto fill = static_cast<std::size_t>(std::lround(1 / transform.fill_ratio()));
  std::vector<std::complex<double>> bins;
  for (std::size_t j = 0; j < spectrum.size(); j += fill) bins.push_back(spectrum[j]);

  std::vector<double> powers;
  for (const auto& bin : bins) powers.push_back(std::norm(bin));
  // Powers of noise are exponential: the median is ln 2 of the mean, and one in
  // 160,000 is above 12 means. Twice, for lines raise the first median a little.
  std::vector<bool> loud(bins.size(), false);
  for (int round = 0; round < 2; ++round) {
    std::vector<double> quiet;
    for (std::size_t j = 0; j < bins.size(); ++j) {
      if (!loud[j]) quiet.push_back(powers[j]);
    }
    std::nth_element(quiet.begin(), quiet.begin() + static_cast<std::ptrdiff_t>(quiet.size() / 2),
                     quiet.end());
    const double limit = 12 * quiet[quiet.size() / 2] / std::numbers::ln2;
    for (std::size_t j = 0; j < bins.size(); ++j) {
      if (powers[j] <= limit) continue;
      for (std::size_t near = j - std::min<std::size_t>(j, 24);
           near < std::min(bins.size(), j + 25); ++near) {
        loud[near] = true;
      }
    }
  }
  std::vector<double> noise;
  for (std::size_t j = 0; j < bins.size(); j += 3) {
    if (loud[j]) continue;
    noise.push_back(bins[j].real());
    noise.push_back(bins[j].imag());
  }
  return noise;
}

// One run whose increments are dealt out of `noise`, with `coherent` times the
// noise's rms added to each increment in alternating sign from bin to bin.
v1::Advice Judge(const std::vector<double>& noise, double coherent) {
  const std::size_t points = noise.size() / kIncrements;
  double squares = 0;
  for (double value : noise) squares += value * value;
  const double rms = std::sqrt(squares / static_cast<double>(noise.size()));
  v1::Snapshot snapshot;
  snapshot.set_run("dealt");
  snapshot.set_instrument("bench-1");
  snapshot.set_sample("noise");
  snapshot.set_nucleus("1H");
  snapshot.set_observe_frequency_mhz(300);
  snapshot.set_spectral_width_hz(3000);
  snapshot.set_domain(v1::SPECTRUM);
  snapshot.set_encoding(v1::FLOAT64);
  snapshot.set_accumulation(v1::SUM);
  snapshot.set_points(static_cast<std::uint32_t>(points));
  Run run(DefaultSettings());
  std::vector<double> sum(points, 0.0);
  v1::Advice advice;
  for (std::size_t k = 0; k < kIncrements; ++k) {
    for (std::size_t j = 0; j < points; ++j) {
      sum[j] += noise[j * kIncrements + k] + (j % 2 == 0 ? coherent : -coherent) * rms;
    }
    snapshot.set_scans_done(k + 1);
    snapshot.mutable_recorded_at()->set_seconds(1'800'000'000 + 10 * static_cast<std::int64_t>(k));
    std::string frame(points * sizeof(double), '\0');
    std::memcpy(frame.data(), sum.data(), frame.size());
    advice = run.Admit(snapshot, frame);
  }
  // The noise of one scan is that which was dealt, coherent or not.
  EXPECT_NEAR(advice.noise().per_scan() / rms, 1, 0.05);
  return advice;
}

class RealNoise : public ::testing::TestWithParam<const char*> {
 protected:
  void SetUp() override {
    const char* folder = std::getenv("LASTSCAN_OPEN_DATA");
    ASSERT_NE(folder, nullptr) << "LASTSCAN_OPEN_DATA is not set: run tests/published/open_data.sh "
                                  "FOLDER and set it to that folder";
    noise_ = NoiseBetweenLines(std::string(folder) + "/" + GetParam());
    ASSERT_GE(noise_.size(), kIncrements * 100);
  }
  std::vector<double> noise_;
};

TEST_P(RealNoise, GrowsWithTheRootOfTheScans) {
  constexpr int kDeals = 200;
  std::mt19937_64 random(3);
  int held = 0;
  double mean = 0;
  double width = 0;
  for (int deal = 0; deal < kDeals; ++deal) {
    std::shuffle(noise_.begin(), noise_.end(), random);
    const v1::Interval exponent = Judge(noise_, 0).noise().growth_exponent();
    held += exponent.lower() <= 0.5 && 0.5 <= exponent.upper() ? 1 : 0;
    mean += exponent.estimate() / kDeals;
    width += (exponent.upper() - exponent.lower()) / kDeals;
  }
  // 95 % of 200, less three standard deviations of that count.
  EXPECT_GE(held, 0.95 * kDeals - 3 * std::sqrt(0.95 * 0.05 * kDeals));
  // An interval so wide that it holds anything would say nothing.
  EXPECT_LT(width, 0.4);
  EXPECT_NEAR(mean, 0.5, 3 * width / 4 / std::sqrt(kDeals));
}

TEST_P(RealNoise, NoLongerDoesWithSomethingCoherentInIt) {
  std::mt19937_64 random(4);
  for (int deal = 0; deal < 20; ++deal) {
    std::shuffle(noise_.begin(), noise_.end(), random);
    const v1::Interval exponent = Judge(noise_, 1).noise().growth_exponent();
    EXPECT_GT(exponent.lower(), 0.5) << deal;
    EXPECT_NEAR(exponent.estimate(), 1, 0.3) << deal;
  }
}

INSTANTIATE_TEST_SUITE_P(OpenData, RealNoise,
                         ::testing::Values("aspirin-1h.fid.dx", "naphtoicAcid-1h.fid.dx"),
                         [](const auto& info) { return std::string(info.param).substr(0, 7); });

}  // namespace
}  // namespace lastscan::engine
