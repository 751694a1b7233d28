// Invented points and snapshots for the tests of the engine: white noise,
// damped lines and the frames they travel in.
#pragma once

#include <gtest/gtest.h>

#include <boost/random/normal_distribution.hpp>
#include <cmath>
#include <complex>
#include <cstddef>
#include <cstdint>
#include <cstring>
#include <numbers>
#include <random>
#include <string>
#include <string_view>
#include <vector>

#include "engine/refusal.h"
#include "engine/spectrum/axis.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

using Complex = std::complex<double>;
using Points = std::vector<Complex>;

// White noise from a seed, the same on every machine.
class Noise {
 public:
  explicit Noise(std::uint64_t seed) : random_(seed) {}

  double Next() { return normal_(random_); }
  // `rms` is that of each quadrature.
  Complex NextComplex(double rms = 1) {
    const double real = rms * Next();
    return {real, rms * Next()};
  }
  void AddTo(Points& points, double rms) {
    for (Complex& point : points) point += NextComplex(rms);
  }
  double Uniform(double low, double high) {
    return low + (high - low) * static_cast<double>(random_() >> 11) * 0x1p-53;
  }

 private:
  std::mt19937_64 random_;
  boost::random::normal_distribution<double> normal_;
};

// amplitude exp((-rate + 2 pi i cycles) t), t = 0, 1, ... in points.
inline void AddLine(Points& points, Complex amplitude, double cycles, double rate) {
  for (std::size_t t = 0; t < points.size(); ++t) {
    const auto at = static_cast<double>(t);
    points[t] += amplitude * std::polar(std::exp(-rate * at), 2 * std::numbers::pi * cycles * at);
  }
}

// A complete snapshot of a carbon-13 FID of `points` points, 2,000 Hz wide at
// 100 MHz (20 ppm about 100 ppm), to be changed by the test.
inline v1::Snapshot PlainSnapshot(std::uint32_t points, std::uint64_t scans = 1) {
  v1::Snapshot snapshot;
  snapshot.set_run("night 1");
  snapshot.set_instrument("bench-1");
  snapshot.set_sample("invented");
  snapshot.set_nucleus("13C");
  snapshot.set_observe_frequency_mhz(100);
  snapshot.set_spectral_width_hz(2000);
  snapshot.set_centre_shift_ppm(100);
  snapshot.set_domain(v1::FID);
  snapshot.set_encoding(v1::FLOAT64);
  snapshot.set_points(points);
  snapshot.set_scans_done(scans);
  snapshot.set_scans_planned(1024);
  snapshot.set_accumulation(v1::SUM);
  snapshot.mutable_recorded_at()->set_seconds(1'800'000'000);
  return snapshot;
}

template <typename Scalar>
std::string FrameOf(const std::vector<Scalar>& values) {
  std::string frame(values.size() * sizeof(Scalar), '\0');
  std::memcpy(frame.data(), values.data(), frame.size());
  return frame;
}
inline std::string FrameOf(const Points& points) {
  std::string frame(points.size() * sizeof(Complex), '\0');
  std::memcpy(frame.data(), static_cast<const void*>(points.data()), frame.size());
  return frame;
}

inline v1::ShiftRange ShiftsFrom(double low, double high) {
  v1::ShiftRange range;
  range.set_low_ppm(low);
  range.set_high_ppm(high);
  return range;
}

// What a refusal says; fails the test when nothing is refused.
template <typename Call>
std::string RefusalOf(Call call) {
  try {
    call();
  } catch (const Refusal& refusal) {
    const std::string text = refusal.what();
    EXPECT_EQ(text.find('\n'), std::string::npos) << "one line: " << text;
    return text;
  }
  ADD_FAILURE() << "nothing was refused";
  return {};
}

}  // namespace lastscan::engine
