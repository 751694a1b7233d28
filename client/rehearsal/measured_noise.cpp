#include "rehearsal/measured_noise.h"

#include <algorithm>
#include <bit>
#include <boost/random/normal_distribution.hpp>
#include <cmath>
#include <complex>
#include <string>
#include <unsupported/Eigen/FFT>

#include "rehearsal/noise_level.h"

namespace lastscan::rehearsal {
namespace {

using Complex = std::complex<double>;

// `values`, given at the middles of equal parts of 0..1, at `place`.
double Between(const std::vector<double>& values, double place) {
  const double last = static_cast<double>(values.size() - 1);
  const double at = std::clamp(place * static_cast<double>(values.size()) - 0.5, 0.0, last);
  const auto left = static_cast<std::size_t>(at);
  const std::size_t right = std::min(left + 1, values.size() - 1);
  const double share = at - static_cast<double>(left);
  return (1 - share) * values[left] + share * values[right];
}

// Normal noise of `count` complex points, each quadrature of variance 1, with
// the power spectrum power(cycles per point), cycles from -0.5 to 0.5.
template <typename Power>
std::vector<Complex> Shaped(std::size_t count, std::mt19937_64& random, Power power) {
  const std::size_t bins = std::bit_ceil(count);
  std::vector<Complex> spectrum(bins);
  boost::random::normal_distribution<double> normal(0, 1);
  double total = 0;
  for (std::size_t i = 0; i < bins; ++i) {
    const double place = static_cast<double>(i) / static_cast<double>(bins);
    const double of_bin = power(place < 0.5 ? place : place - 1);
    total += of_bin;
    const double real = normal(random);
    spectrum[i] = std::sqrt(of_bin) * Complex(real, normal(random));
  }
  std::vector<Complex> points(bins);
  Eigen::FFT<double> fft;
  fft.SetFlag(Eigen::FFT<double>::Unscaled);
  fft.inv(points.data(), spectrum.data(), static_cast<Eigen::Index>(bins));
  points.resize(count);
  for (Complex& point : points) point /= std::sqrt(total);
  return points;
}

}  // namespace

MeasuredNoise MeasureNoise(const formats::Recording& finished) {
  constexpr std::size_t kFewestPoints = 64;
  const bool fid = finished.snapshot.domain() == v1::FID;
  const std::string run = "run '" + finished.snapshot.run() + "': ";
  const std::size_t points = finished.samples.size() / (fid ? 2 : 1);
  if (points < kFewestPoints) {
    throw formats::Unreadable(run + "the noise cannot be measured in " + std::to_string(points) +
                              " points: name a recording of at least " +
                              std::to_string(kFewestPoints));
  }
  for (std::size_t i = 0; i < finished.samples.size(); ++i) {
    if (std::isfinite(finished.samples[i])) continue;
    throw formats::Unreadable(run + "point " + std::to_string(fid ? i / 2 : i) +
                              " is not a finite number: export the recording again");
  }
  return fid ? MeasureFidNoise(finished.samples) : MeasureSpectrumNoise(finished.samples);
}

std::vector<double> DrawNoise(const MeasuredNoise& noise, std::size_t samples,
                              std::mt19937_64& random) {
  std::vector<double> drawn(samples, 0.0);
  if (noise.rms == 0) return drawn;
  if (noise.along_points.empty()) {
    const auto points = Shaped(samples / 2 - noise.filled_points, random, [&](double cycles) {
      return Between(noise.passband, cycles + 0.5);
    });
    // noise.rms is the average over the bands; Shaped gives that average 1.
    for (std::size_t t = 0; t < points.size(); ++t) {
      drawn[2 * t] = noise.rms * points[t].real();
      drawn[2 * t + 1] = noise.rms * points[t].imag();
    }
    return drawn;
  }
  const auto points = Shaped(samples, random, [&](double cycles) {
    const double last = static_cast<double>(noise.along_points.size() - 1);
    // along_points[0] stands for 0 and the last one for half a cycle.
    return Between(noise.along_points,
                   (2 * std::abs(cycles) * last + 0.5) / static_cast<double>(last + 1));
  });
  const double inside = noise.rms / std::sqrt(Mean(noise.passband));
  for (std::size_t i = 0; i < samples; ++i) {
    const double place = (static_cast<double>(i) + 0.5) / static_cast<double>(samples);
    drawn[i] = inside * std::sqrt(Between(noise.passband, place)) * points[i].real();
  }
  return drawn;
}

}  // namespace lastscan::rehearsal
