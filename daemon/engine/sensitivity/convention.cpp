#include "engine/sensitivity/convention.h"

#include <boost/math/distributions/normal.hpp>
#include <boost/math/quadrature/tanh_sinh.hpp>
#include <cmath>

namespace lastscan::engine {

double ExpectedRange(double count) {
  const boost::math::normal normal;
  const auto spread = [&](double x) {
    const double above = boost::math::cdf(boost::math::complement(normal, x));
    return -std::expm1(count * std::log1p(-above)) - std::pow(above, count);
  };
  // 1 - F^M - (1-F)^M is even in x.
  boost::math::quadrature::tanh_sinh<double> integrator;
  return 2 * integrator.integrate(spread, 0.0, 12.0);
}

double ConventionFactor(v1::Convention convention, double noise_points) {
  switch (convention) {
    case v1::HEIGHT_OVER_TWICE_RMS:
      return 0.5;
    case v1::PEAK_TO_PEAK:
      return 2.5 / ExpectedRange(noise_points);
    default:
      return 1;
  }
}

}  // namespace lastscan::engine
