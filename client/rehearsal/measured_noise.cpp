#include "rehearsal/measured_noise.h"

#include <algorithm>
#include <bit>
#include <boost/random/normal_distribution.hpp>
#include <cmath>
#include <complex>
#include <numbers>
#include <numeric>
#include <span>
#include <unsupported/Eigen/FFT>

namespace lastscan::rehearsal {
namespace {

using Complex = std::complex<double>;

constexpr double kPi = std::numbers::pi;
constexpr int kBands = MeasuredNoise::kBands;

// A level with its relative standard deviation; of a band without a quiet bin
// it is 0 and infinite.
struct Level {
  double power = 0;
  double deviation = INFINITY;
  bool known() const { return std::isfinite(deviation); }
};

double Quantile(std::vector<double> values, double share) {
  const auto at =
      values.begin() + static_cast<std::ptrdiff_t>(share * static_cast<double>(values.size() - 1));
  std::nth_element(values.begin(), at, values.end());
  return *at;
}

// The level inside the passband, from bands of which most lie inside it and are
// not crowded with lines.
Level InsidePassband(const std::vector<Level>& bands) {
  std::vector<double> powers;
  for (const Level& band : bands) {
    if (band.known()) powers.push_back(band.power);
  }
  if (powers.empty()) return {};
  const double middle = Quantile(powers, 0.5);
  double sum = 0;
  double weights = 0;
  for (const Level& band : bands) {
    if (!band.known() || std::abs(band.power / middle - 1) > 3 * band.deviation) continue;
    const double weight = 1 / (band.deviation * band.deviation);
    sum += weight * band.power;
    weights += weight;
  }
  if (weights == 0) return {middle, 1};
  return {sum / weights, 1 / std::sqrt(weights)};
}

// Each band over the passband where it is clearly lower, else 1.
std::vector<double> Passband(const std::vector<Level>& bands, const Level& inside) {
  std::vector<double> passband;
  for (const Level& band : bands) {
    const double ratio = inside.power > 0 && band.known() ? band.power / inside.power : 1;
    passband.push_back(ratio < 1 - 3 * band.deviation ? ratio : 1);
  }
  return passband;
}

double Mean(const std::vector<double>& values) {
  return std::accumulate(values.begin(), values.end(), 0.0) / static_cast<double>(values.size());
}

// `values`, given at the middles of equal parts of 0..1, at `place`.
double Between(const std::vector<double>& values, double place) {
  const double last = static_cast<double>(values.size() - 1);
  const double at = std::clamp(place * static_cast<double>(values.size()) - 0.5, 0.0, last);
  const auto left = static_cast<std::size_t>(at);
  const std::size_t right = std::min(left + 1, values.size() - 1);
  const double share = at - static_cast<double>(left);
  return (1 - share) * values[left] + share * values[right];
}

// -- FID ----------------------------------------------------------------------

// Mean power of exponentially distributed bins among which lines stand. Bins
// over kCut times the mean are left out, and what that takes from the mean of
// an exponential distribution is put back; around strong bins the feet go too.
Level BelowLines(std::span<const double> bins, double independent_share, std::size_t feet) {
  constexpr double kCut = 6.9;  // a share of 0.001 of pure noise lies above
  constexpr double kStrong = 30;
  constexpr double kFewest = 0.25;  // share of bins that must remain
  const double whole_mean = 1 - kCut * std::exp(-kCut) / -std::expm1(-kCut);
  double mean = Quantile({bins.begin(), bins.end()}, 0.25) / -std::log(0.75);
  std::size_t kept = 0;
  for (int round = 0; round < 50; ++round) {
    std::vector<char> out(bins.size(), 0);
    for (std::size_t i = 0; i < bins.size(); ++i) {
      if (bins[i] > kCut * mean) out[i] = 1;
      if (bins[i] <= kStrong * mean) continue;
      const std::size_t first = i > feet ? i - feet : 0;
      const std::size_t last = std::min(i + feet, bins.size() - 1);
      std::fill(out.begin() + first, out.begin() + last + 1, 1);
    }
    double sum = 0;
    kept = 0;
    for (std::size_t i = 0; i < bins.size(); ++i) {
      if (out[i]) continue;
      sum += bins[i];
      ++kept;
    }
    if (static_cast<double>(kept) < kFewest * static_cast<double>(bins.size())) return {};
    const double before = mean;
    mean = sum / static_cast<double>(kept) / whole_mean;
    if (std::abs(mean - before) <= 1e-9 * before) break;
  }
  return {mean, 1 / std::sqrt(std::max(1.0, independent_share * static_cast<double>(kept)))};
}

// Level of each band, per complex point, of the FID's points.
std::vector<Level> BandsOfFid(std::span<const Complex> points) {
  const std::size_t bins = std::bit_ceil(points.size());
  std::vector<Complex> weighted(bins);
  double power = 0;
  for (std::size_t t = 0; t < points.size(); ++t) {
    // sin^4: three derivatives vanish at both ends, so feet fall with the
    // fifth power of the distance from a line.
    const double sine =
        std::sin(kPi * (static_cast<double>(t) + 0.5) / static_cast<double>(points.size()));
    const double weight = sine * sine * sine * sine;
    weighted[t] = weight * points[t];
    power += weight * weight;
  }
  std::vector<Complex> spectrum(bins);
  Eigen::FFT<double> fft;
  fft.fwd(spectrum.data(), weighted.data(), static_cast<Eigen::Index>(bins));
  std::rotate(spectrum.begin(), spectrum.begin() + static_cast<std::ptrdiff_t>(bins / 2),
              spectrum.end());
  std::vector<double> powers(bins);
  for (std::size_t i = 0; i < bins; ++i) powers[i] = std::norm(spectrum[i]) / power;
  // The window makes 1.94 neighbouring bins alike (its noise bandwidth
  // 35/18), zero filling more.
  const double filling = static_cast<double>(bins) / static_cast<double>(points.size());
  const double independent_share = 18.0 / 35 / filling;
  const auto feet = static_cast<std::size_t>(std::ceil(4 * filling));
  const std::size_t band = bins / kBands;
  if (band < 8) return std::vector<Level>(kBands, BelowLines(powers, independent_share, feet));
  std::vector<Level> levels;
  for (int i = 0; i < kBands; ++i) {
    levels.push_back(
        BelowLines(std::span(powers).subspan(i * band, band), independent_share, feet));
  }
  return levels;
}

MeasuredNoise MeasureFid(const std::vector<double>& samples) {
  std::vector<Complex> points(samples.size() / 2);
  for (std::size_t t = 0; t < points.size(); ++t) {
    points[t] = {samples[2 * t], samples[2 * t + 1]};
  }
  MeasuredNoise noise;
  std::size_t acquired = points.size();
  while (acquired > 0 && points[acquired - 1] == Complex(0)) --acquired;
  noise.filled_points = points.size() - acquired;
  noise.passband.assign(kBands, 1);
  if (acquired < kBands) return noise;
  points.resize(acquired);

  std::vector<Level> bands = BandsOfFid(points);
  Level inside = InsidePassband(bands);
  const std::vector<Level> later_bands = BandsOfFid(std::span(points).subspan(acquired / 2));
  const Level later = InsidePassband(later_bands);
  const double doubt = std::hypot(inside.deviation, later.deviation);
  if (later.known() && (!inside.known() || later.power < inside.power * (1 - 4 * doubt))) {
    bands = later_bands;
    inside = later;
  }
  if (!inside.known()) {
    // Lines wherever one looks: what is left when they have decayed.
    double energy = 0;
    const std::span tail = std::span(points).last(acquired / 8);
    for (const Complex& point : tail) energy += std::norm(point);
    inside = {energy / static_cast<double>(tail.size()), 1};
  }
  noise.passband = Passband(bands, inside);
  noise.rms = std::sqrt(inside.power / 2 * Mean(noise.passband));
  return noise;
}

// -- Spectrum -----------------------------------------------------------------

constexpr std::size_t kStretch = 256;  // points read together
constexpr std::size_t kSlowest = 3;    // lowest bins of a stretch: base line, feet
constexpr double kLoudest = 1.6;       // times the lower quartile: still quiet

// Power spectrum of a stretch without its straight-line trend, up to half a
// cycle per point, scaled so that its mean is the variance of the points.
std::vector<double> PowerAlong(std::span<const double> stretch) {
  const double count = static_cast<double>(stretch.size());
  const double middle = 0.5 * (count - 1);
  double mean = 0;
  double slope = 0;
  for (std::size_t i = 0; i < stretch.size(); ++i) {
    mean += stretch[i] / count;
    slope += stretch[i] * (static_cast<double>(i) - middle);
  }
  slope *= 12 / (count * (count * count - 1));
  std::vector<Complex> weighted(stretch.size());
  double power = 0;
  for (std::size_t i = 0; i < stretch.size(); ++i) {
    const double sine = std::sin(kPi * (static_cast<double>(i) + 0.5) / count);
    const double weight = sine * sine;
    weighted[i] = weight * (stretch[i] - mean - slope * (static_cast<double>(i) - middle));
    power += weight * weight;
  }
  std::vector<Complex> spectrum(stretch.size());
  Eigen::FFT<double> fft;
  fft.fwd(spectrum.data(), weighted.data(), static_cast<Eigen::Index>(stretch.size()));
  std::vector<double> powers(stretch.size() / 2 + 1);
  for (std::size_t i = 0; i < powers.size(); ++i) powers[i] = std::norm(spectrum[i]) / power;
  // The slowest bins hold base line and the feet of lines, less the trend taken
  // away; the noise there is that of the next ones.
  const double next = (powers[kSlowest] + powers[kSlowest + 1] + powers[kSlowest + 2]) / 3;
  std::fill(powers.begin(), powers.begin() + kSlowest, next);
  return powers;
}

MeasuredNoise MeasureSpectrum(const std::vector<double>& samples) {
  MeasuredNoise noise;
  noise.passband.assign(kBands, 1);
  const std::size_t length = std::min(kStretch, std::bit_floor(samples.size() / 4));
  const std::size_t count = (samples.size() - length) / (length / 2) + 1;
  std::vector<std::vector<double>> stretches(count);
  std::vector<double> powers(count);
  for (std::size_t i = 0; i < count; ++i) {
    stretches[i] = PowerAlong(std::span(samples).subspan(i * (length / 2), length));
    powers[i] = Mean(stretches[i]);
  }
  const double loudest = kLoudest * Quantile(powers, 0.25);
  noise.along_points.assign(length / 2 + 1, 0);
  std::vector<double> sums(kBands, 0);
  std::vector<double> numbers(kBands, 0);
  std::size_t kept = 0;
  for (std::size_t i = 0; i < count; ++i) {
    if (powers[i] > loudest) continue;
    ++kept;
    for (std::size_t j = 0; j < stretches[i].size(); ++j) {
      noise.along_points[j] += stretches[i][j];
    }
    const std::size_t middle = i * (length / 2) + length / 2;
    const std::size_t band = middle * kBands / samples.size();
    sums[band] += powers[i];
    numbers[band] += 1;
  }
  const double mean = Mean(noise.along_points);
  for (double& value : noise.along_points) value = mean > 0 ? value / mean : 1;
  // Independent points in a stretch: the window and the likeness of neighbours
  // both take their share; half of it is left to a stretch by its overlap.
  double squares = 0;
  for (const double value : noise.along_points) squares += value * value;
  const double independent = static_cast<double>(length) / 2 / 2 *
                             static_cast<double>(noise.along_points.size()) / squares;
  std::vector<Level> bands(kBands);
  for (int i = 0; i < kBands; ++i) {
    if (numbers[i] == 0) continue;
    bands[i] = {sums[i] / numbers[i], std::sqrt(2 / std::max(1.0, independent * numbers[i]))};
  }
  const Level inside = InsidePassband(bands);
  noise.passband = Passband(bands, inside);
  noise.rms = std::sqrt(inside.power * Mean(noise.passband));
  return noise;
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
  return finished.snapshot.domain() == v1::FID ? MeasureFid(finished.samples)
                                               : MeasureSpectrum(finished.samples);
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
