// Noise of an FID from the bins between its lines.
#include <algorithm>
#include <bit>
#include <cmath>
#include <complex>
#include <numbers>
#include <span>
#include <unsupported/Eigen/FFT>

#include "rehearsal/measured_noise.h"
#include "rehearsal/noise_level.h"

namespace lastscan::rehearsal {
namespace {

using Complex = std::complex<double>;

constexpr double kPi = std::numbers::pi;
constexpr std::size_t kBands = MeasuredNoise::kBands;

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

constexpr double kFewestInBand = 60;  // independent bins

// Level of each band, per complex point, of the FID's points; at most kBands.
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
  // Fewer bands, each standing for several, where a band would hold too few.
  const double independent = independent_share * static_cast<double>(bins);
  const auto bands = std::clamp<std::size_t>(
      std::bit_floor(static_cast<std::size_t>(independent / kFewestInBand)), 1, kBands);
  std::vector<Level> levels;
  for (std::size_t i = 0; i < bands; ++i) {
    const auto part = std::span(powers).subspan(i * (bins / bands), bins / bands);
    levels.push_back(BelowLines(part, independent_share, feet));
  }
  return levels;
}

}  // namespace

MeasuredNoise MeasureFidNoise(const std::vector<double>& samples) {
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
  noise.passband = PassbandOf(bands, inside);
  noise.rms = std::sqrt(inside.power / 2 * Mean(noise.passband));
  return noise;
}

}  // namespace lastscan::rehearsal
