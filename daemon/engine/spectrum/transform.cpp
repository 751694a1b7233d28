#include "engine/spectrum/transform.h"

#include <algorithm>
#include <bit>
#include <cmath>
#include <numbers>
#include <unsupported/Eigen/FFT>

namespace lastscan::engine {

Transform::Transform(const v1::Snapshot& snapshot, double broadening_hz)
    : fid_(snapshot.domain() == v1::FID), points_(snapshot.points()) {
  const double width = snapshot.spectral_width_hz();
  axis_.observe_frequency_mhz = snapshot.observe_frequency_mhz();
  if (!fid_) {
    axis_.bins = static_cast<std::ptrdiff_t>(points_);
    axis_.hz_per_bin = width / static_cast<double>(points_);
    axis_.first_ppm =
        snapshot.centre_shift_ppm() - 0.5 * static_cast<double>(points_ - 1) * axis_.ppm_per_bin();
    independent_bins_ = static_cast<double>(points_);
    return;
  }
  axis_.bins = static_cast<std::ptrdiff_t>(std::bit_ceil(2 * points_));
  axis_.hz_per_bin = width / static_cast<double>(axis_.bins);
  axis_.first_ppm = snapshot.centre_shift_ppm() - 0.5 * width / axis_.observe_frequency_mhz;
  acquisition_seconds_ = static_cast<double>(points_) / width;
  decay_per_point_ = std::numbers::pi * broadening_hz / width;
  // Sums of a geometric series: sum w^2 and sum w^4 over the points.
  const auto series = [&](double power) {
    const double step = power * decay_per_point_;
    const double count = static_cast<double>(points_);
    return step == 0 ? count : std::expm1(-step * count) / std::expm1(-step);
  };
  noise_gain_ = std::sqrt(series(2));
  independent_bins_ = series(2) * series(2) / series(4);
}

double Transform::fill_ratio() const {
  return static_cast<double>(points_) / static_cast<double>(axis_.bins);
}

std::vector<std::complex<double>> Transform::Apply(std::vector<std::complex<double>> summed) const {
  if (!fid_) return summed;
  // exp(-d t) by a recurrence restarted each 64 points: exact to rounding, and
  // free of a call to exp for each point.
  constexpr std::size_t kRestart = 64;
  const double factor = std::exp(-decay_per_point_);
  double weight = 1;
  for (std::size_t t = 0; t < points_; ++t) {
    if (t % kRestart == 0) weight = std::exp(-decay_per_point_ * static_cast<double>(t));
    summed[t] *= weight;
    weight *= factor;
  }
  // The transform's sum is a trapezoid: half the first point, or every line
  // stands on a constant pedestal. Behind a digital receiver the first point
  // belongs to the build-up and is next to nothing anyway.
  summed[0] *= 0.5;
  const auto bins = static_cast<std::size_t>(axis_.bins);
  summed.resize(bins);
  std::vector<std::complex<double>> spectrum(bins);
  // Plans are kept per thread: they hold twiddle factors, nothing of the data.
  thread_local Eigen::FFT<double> fft;
  fft.fwd(spectrum.data(), summed.data(), static_cast<Eigen::Index>(bins));
  std::rotate(spectrum.begin(), spectrum.begin() + axis_.bins / 2, spectrum.end());
  return spectrum;
}

}  // namespace lastscan::engine
