// Exact limits for counts and variances drawn with a fixed seed. A claim that
// holds is refused by one of them with a chance of 1 in 1,000 at most.
#pragma once

#include <boost/math/distributions/binomial.hpp>
#include <boost/math/distributions/chi_squared.hpp>

namespace lastscan::engine {

inline constexpr double kRefuseTrueClaim = 0.001;

// Most hits that `trials` of probability `p` or less can be expected to have.
inline int MostHits(int trials, double p) {
  return static_cast<int>(boost::math::quantile(
      boost::math::complement(boost::math::binomial(trials, p), kRefuseTrueClaim)));
}

// Fewest hits of `trials` of probability `p` or more.
inline int FewestHits(int trials, double p) { return trials - MostHits(trials, 1 - p); }

// Limits of a sum of squares over the variance, with so many degrees of freedom.
inline double LowestChiSquare(double degrees) {
  return boost::math::quantile(boost::math::chi_squared(degrees), kRefuseTrueClaim / 2);
}
inline double HighestChiSquare(double degrees) {
  return boost::math::quantile(
      boost::math::complement(boost::math::chi_squared(degrees), kRefuseTrueClaim / 2));
}

}  // namespace lastscan::engine
