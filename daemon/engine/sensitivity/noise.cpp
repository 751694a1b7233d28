#include "engine/sensitivity/noise.h"

#include <algorithm>
#include <bit>
#include <boost/math/distributions/chi_squared.hpp>
#include <cmath>
#include <numbers>
#include <unsupported/Eigen/FFT>

namespace lastscan::engine {
namespace {

template <typename Value>
double MedianInPlace(std::vector<Value>& values) {
  const auto middle = values.begin() + static_cast<std::ptrdiff_t>(values.size() / 2);
  std::nth_element(values.begin(), middle, values.end());
  if (values.size() % 2 == 1) return *middle;
  return 0.5 * (static_cast<double>(*middle) +
                static_cast<double>(*std::max_element(values.begin(), middle)));
}

std::size_t Stride(double fill_ratio) {
  return std::max<std::size_t>(1, static_cast<std::size_t>(std::floor(1 / fill_ratio + 1e-9)));
}

}  // namespace

double ChiSquareMedian(double degrees) {
  return boost::math::median(boost::math::chi_squared(degrees));
}

double RelativeDeviationOfMedian(double degrees, double count) {
  // Asymptotic deviation of a median, 1/(2 f(median) sqrt(count)), and half of
  // it relative, for sigma goes as the root.
  const boost::math::chi_squared distribution(degrees);
  const double median = boost::math::median(distribution);
  return 0.25 / (boost::math::pdf(distribution, median) * median * std::sqrt(count));
}

double Scatter::Add(std::span<const std::complex<double>> accumulated, double scans, double before,
                    bool complex, double fill_ratio) {
  double of_increment = 0;
  if (empty()) {
    scatter_.assign(accumulated.size(), 0.0F);
    sum_.assign(accumulated.size(), {});
  } else {
    const double m = scans - scans_;
    const double weight = m * scans_ / scans;
    const std::size_t stride = Stride(fill_ratio);
    std::vector<float> added;
    added.reserve(scatter_.size() / stride + 1);
    for (std::size_t j = 0; j < scatter_.size(); ++j) {
      const std::complex<double> earlier(sum_[j]);
      const std::complex<double> difference =
          (accumulated[j] - earlier) * (1 / m) - earlier * (1 / scans_);
      const auto term = static_cast<float>(weight * std::norm(difference));
      scatter_[j] += term;
      if (j % stride == 0) added.push_back(term);
    }
    // A term's variance mixes both sides: (n s_k^2 + m s^2) / (n + m).
    const double mixed = MedianInPlace(added) / ChiSquareMedian(complex ? 2 : 1);
    const double variance = (mixed * scans - m * before * before) / scans_;
    of_increment = std::sqrt(std::max(variance, 0.0));
  }
  for (std::size_t j = 0; j < sum_.size(); ++j) sum_[j] = std::complex<float>(accumulated[j]);
  scans_ = scans;
  ++increments_;
  return of_increment;
}

NoiseEstimate Scatter::Estimate(bool complex, double fill_ratio, double independent_bins) const {
  const double degrees = (complex ? 2.0 : 1.0) * (increments_ - 1);
  const std::size_t stride = Stride(fill_ratio);
  std::vector<float> thinned;
  thinned.reserve(scatter_.size() / stride + 1);
  for (std::size_t j = 0; j < scatter_.size(); j += stride) thinned.push_back(scatter_[j]);
  NoiseEstimate noise;
  noise.per_scan = std::sqrt(MedianInPlace(thinned) / ChiSquareMedian(degrees));
  noise.relative_deviation = RelativeDeviationOfMedian(degrees, independent_bins);
  noise.from_increments = true;
  return noise;
}

void Scatter::Restore(std::vector<std::complex<float>> sum, std::vector<float> scatter,
                      double scans, int increments) {
  sum_ = std::move(sum);
  scatter_ = std::move(scatter);
  scans_ = scans;
  increments_ = increments;
}

NoiseEstimate NoiseOfQuietBands(std::span<const std::complex<double>> spectrum, double scans,
                                bool complex, double fill_ratio, double independent_bins) {
  const std::size_t stride = Stride(fill_ratio);
  const std::size_t thinned = spectrum.size() / stride;
  const std::size_t bands = std::clamp<std::size_t>(thinned / 64, 1, 64);
  const std::size_t length = thinned / bands;
  const double degrees = complex ? 2 : 1;
  std::vector<double> levels;
  std::vector<double> powers;
  for (std::size_t band = 0; band < bands; ++band) {
    const std::size_t first = band * length * stride;
    // A base line under a real spectrum is not noise: take the band's median off.
    double offset = 0;
    if (!complex) {
      powers.clear();
      for (std::size_t i = 0; i < length; ++i)
        powers.push_back(spectrum[first + i * stride].real());
      offset = MedianInPlace(powers);
    }
    powers.clear();
    for (std::size_t i = 0; i < length; ++i) {
      powers.push_back(std::norm(spectrum[first + i * stride] - offset));
    }
    levels.push_back(MedianInPlace(powers) / ChiSquareMedian(degrees));
  }
  // Bands that hold nothing at all (a zero-filled or blanked edge) are not quiet
  // but empty.
  std::erase_if(levels, [](double level) { return level <= 0; });
  NoiseEstimate noise;
  if (levels.empty()) return noise;
  // The lower half of the bands, and of these the median: the lower quartile.
  // Its pull below the mean of equal bands is taken back with the band's own
  // scatter, 0.674 standard deviations at the quartile of a normal.
  std::sort(levels.begin(), levels.end());
  const double quartile = levels[levels.size() / 4];
  const double in_band = independent_bins / static_cast<double>(bands);
  const double pull =
      levels.size() < 4 ? 0 : 0.674 * 2 * RelativeDeviationOfMedian(degrees, in_band);
  noise.per_scan = std::sqrt(quartile * (1 + pull) / scans);
  noise.relative_deviation = RelativeDeviationOfMedian(
      degrees, std::max(in_band * static_cast<double>(levels.size()) / 2, 1.0));
  return noise;
}

NoiseEstimate NoiseOfFid(std::span<const std::complex<double>> summed, double scans) {
  // Points filled in with zeros at the end were never acquired.
  std::size_t points = summed.size();
  while (points > 0 && summed[points - 1] == std::complex<double>(0)) --points;
  NoiseEstimate noise;
  if (points < 64) return noise;
  std::vector<std::complex<double>> weighted(std::bit_ceil(points));
  double power = 0;
  for (std::size_t t = 0; t < points; ++t) {
    const double sine =
        std::sin(std::numbers::pi * (static_cast<double>(t) + 0.5) / static_cast<double>(points));
    const double weight = sine * sine * sine * sine;
    weighted[t] = weight * summed[t];
    power += weight * weight;
  }
  std::vector<std::complex<double>> spectrum(weighted.size());
  thread_local Eigen::FFT<double> fft;
  fft.fwd(spectrum.data(), weighted.data(), static_cast<Eigen::Index>(weighted.size()));
  const double share = static_cast<double>(points) / static_cast<double>(weighted.size());
  // The weights make 35/18 neighbouring bins alike, their noise bandwidth.
  noise =
      NoiseOfQuietBands(spectrum, scans, true, share, static_cast<double>(points) * 18.0 / 35.0);
  noise.per_scan /= std::sqrt(power);
  return noise;
}

double RmsAboutBaseline(std::span<const double> real, BinRange range) {
  const double count = static_cast<double>(range.size());
  const double centre = 0.5 * (count - 1);
  double mean = 0;
  double slope = 0;
  for (std::ptrdiff_t j = 0; j < range.size(); ++j) {
    const double value = real[static_cast<std::size_t>(range.first + j)];
    mean += value;
    slope += value * (static_cast<double>(j) - centre);
  }
  mean /= count;
  slope /= count * (count * count - 1) / 12;
  double squares = 0;
  for (std::ptrdiff_t j = 0; j < range.size(); ++j) {
    const double residual = real[static_cast<std::size_t>(range.first + j)] - mean -
                            slope * (static_cast<double>(j) - centre);
    squares += residual * residual;
  }
  return std::sqrt(squares / (count - 2));
}

}  // namespace lastscan::engine
