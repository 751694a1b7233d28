#include "engine/spectrum/interpolation.h"

#include <array>
#include <boost/math/special_functions/bessel.hpp>
#include <cmath>
#include <numbers>

namespace lastscan::engine {
namespace {

constexpr int kHalfTaps = 8;
constexpr double kKaiserShape = 11.0;  // the widest that half the bins' spacing lets in
constexpr int kTableSteps = 512;       // per bin, read with linear interpolation

// The windowed sinc for offsets 0..kHalfTaps bins.
const std::array<double, kHalfTaps * kTableSteps + 2>& Kernel() {
  static const auto table = [] {
    std::array<double, kHalfTaps * kTableSteps + 2> values{};
    const double scale = boost::math::cyl_bessel_i(0, kKaiserShape);
    for (std::size_t i = 0; i < values.size(); ++i) {
      const double x = static_cast<double>(i) / kTableSteps;
      const double inside = 1 - x * x / (kHalfTaps * kHalfTaps);
      if (inside <= 0) continue;
      const double window = boost::math::cyl_bessel_i(0, kKaiserShape * std::sqrt(inside)) / scale;
      const double angle = std::numbers::pi * x;
      values[i] = window * (i == 0 ? 1.0 : std::sin(angle) / angle);
    }
    return values;
  }();
  return table;
}

double KernelAt(double offset) {
  const double position = std::abs(offset) * kTableSteps;
  const auto index = static_cast<std::size_t>(position);
  const double fraction = position - static_cast<double>(index);
  return Kernel()[index] * (1 - fraction) + Kernel()[index + 1] * fraction;
}

}  // namespace

std::complex<double> ValueBetweenBins(std::span<const std::complex<double>> bins, double fill_ratio,
                                      double bin) {
  const auto count = static_cast<std::ptrdiff_t>(bins.size());
  const auto below = static_cast<std::ptrdiff_t>(std::floor(bin));
  // The points lie at times 0..N-1. Seen from their middle the spectrum turns
  // slowest, which is what lets few taps do; the turn is undone here.
  const double turn = std::numbers::pi * fill_ratio;  // radians per bin
  const std::complex<double> step = std::polar(1.0, turn);
  std::ptrdiff_t k = below - kHalfTaps + 1;
  std::complex<double> turned = std::polar(1.0, -turn * (bin - static_cast<double>(k)));
  std::complex<double> value = 0;
  for (; k <= below + kHalfTaps; ++k, turned *= step) {
    const auto wrapped = static_cast<std::size_t>(((k % count) + count) % count);
    value += bins[wrapped] * turned * KernelAt(bin - static_cast<double>(k));
  }
  return value;
}

Maximum TopOfThree(double left, double middle, double right, double middle_bin) {
  const bool lorentzian = left > 0.2 * middle && right > 0.2 * middle && middle > 0;
  const double a = lorentzian ? 1 / left : left;
  const double b = lorentzian ? 1 / middle : middle;
  const double c = lorentzian ? 1 / right : right;
  const double curvature = a - 2 * b + c;
  if (curvature == 0) return {middle_bin, middle};
  const double shift = 0.5 * (a - c) / curvature;
  const double top = b - 0.25 * (a - c) * shift;
  const double height = lorentzian ? 1 / top : top;
  // Noise can make three points nearly straight; never leave the bin for that.
  if (!(std::abs(shift) <= 1) || !(height >= middle) || !(height < 1.5 * middle)) {
    return {middle_bin, middle};
  }
  return {middle_bin + shift, height};
}

}  // namespace lastscan::engine
