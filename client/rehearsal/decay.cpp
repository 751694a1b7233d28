#include "rehearsal/decay.h"

#include <algorithm>
#include <boost/math/special_functions/bessel.hpp>
#include <cmath>
#include <numbers>

namespace lastscan::rehearsal {
namespace {

using Complex = std::complex<double>;

constexpr double kPi = std::numbers::pi;
constexpr double kShortestHalfLength = 16;  // points; a shorter filter has no flat band
constexpr double kKaiserBeta = 8;           // stop band below -80 dB
constexpr std::size_t kSteps = 16;          // of integration, per point

// Plain product: std::complex's own also minds infinities, at four times the cost.
Complex Times(Complex a, Complex b) {
  return {a.real() * b.real() - a.imag() * b.imag(), a.real() * b.imag() + a.imag() * b.real()};
}

// exp(z (start + t)) for t = 0, 1, 2, ... by a recurrence that is restarted
// each 64 points: exact to rounding.
class Powers {
 public:
  Powers(Complex z, double start) : z_(z), start_(start), factor_(std::exp(z)) {}
  Complex Next() {
    if (count_ % 64 == 0) value_ = std::exp(z_ * (start_ + static_cast<double>(count_)));
    ++count_;
    const Complex value = value_;
    value_ = Times(value_, factor_);
    return value;
  }

 private:
  Complex z_;
  double start_;
  Complex factor_;
  Complex value_;
  std::size_t count_ = 0;
};

double Kernel(double x, double half_length) {
  const double edge = x / half_length;
  if (std::abs(edge) >= 1) return 0;
  const double sinc = x == 0 ? 1 : std::sin(kPi * x) / (kPi * x);
  return sinc * boost::math::cyl_bessel_i(0, kKaiserBeta * std::sqrt(1 - edge * edge)) /
         boost::math::cyl_bessel_i(0, kKaiserBeta);
}

}  // namespace

ReceiverFilter::ReceiverFilter(double delay_points) : delay_points_(delay_points) {
  if (!present()) return;
  // The grid passes through the points of the FID and begins at or before -L.
  const double half_length = std::max(delay_points, kShortestHalfLength);
  const double before = std::ceil(half_length - delay_points);
  const double length = before + std::ceil(delay_points + half_length);
  before_ = static_cast<std::size_t>(before);
  start_ = -delay_points - before;
  kernel_.resize(static_cast<std::size_t>(length) * kSteps + 1);
  for (std::size_t i = 0; i < kernel_.size(); ++i) {
    kernel_[i] = Kernel(start_ + static_cast<double>(i) / kSteps, half_length);
  }
}

std::vector<Complex> ReceiverFilter::BuildUp(Complex z) const {
  Powers powers(-z / static_cast<double>(kSteps), start_ * kSteps);
  std::vector<Complex> response;
  Complex integral = 0;
  Complex left = kernel_[0] * powers.Next();
  if (before_ == 0) response.push_back(0);
  // Simpson's rule, two steps at a time; each kSteps steps are a point.
  for (std::size_t i = 2; i < kernel_.size(); i += 2) {
    const Complex middle = kernel_[i - 1] * powers.Next();
    const Complex right = kernel_[i] * powers.Next();
    integral += (left + 4.0 * middle + right) / (3.0 * kSteps);
    left = right;
    if (i % kSteps == 0 && i / kSteps >= before_) response.push_back(integral);
  }
  return response;
}

void AddDecay(const Decay& decay, const ReceiverFilter& filter, std::span<Complex> points) {
  const Complex z{-decay.rate_per_point, 2 * kPi * decay.cycles_per_point};
  Powers powers(z, -filter.delay_points());
  std::size_t k = 0;
  Complex factor = decay.amplitude;
  if (filter.present()) {
    const std::vector<Complex> response = filter.BuildUp(z);
    for (; k < std::min(response.size(), points.size()); ++k) {
      points[k] += Times(Times(decay.amplitude, response[k]), powers.Next());
    }
    factor = Times(factor, response.back());
  }
  for (; k < points.size(); ++k) points[k] += Times(factor, powers.Next());
}

SpectrumGain GainOfSpectrum(const Decay& decay, const ReceiverFilter& filter, double weight_rate,
                            std::size_t points) {
  std::vector<Complex> line(points);
  AddDecay({1, decay.cycles_per_point, decay.rate_per_point}, filter, line);
  Powers turned({-weight_rate, -2 * kPi * decay.cycles_per_point}, -filter.delay_points());
  Complex height = 0;
  double power = 0;
  for (std::size_t t = 0; t < points; ++t) {
    Complex weight = turned.Next();
    if (t == 0 && !filter.present()) weight *= 0.5;
    height += Times(weight, line[t]);
    power += std::norm(weight);
  }
  return {std::abs(height), std::sqrt(power)};
}

}  // namespace lastscan::rehearsal
