#include "engine/forecast/extrapolation.h"

#include <algorithm>
#include <boost/math/distributions/normal.hpp>
#include <cmath>
#include <limits>

namespace lastscan::engine {
namespace {

double ProbabilityBelow(double z) {
  if (z > 37) return 1;
  if (z < -37) return 0;
  return boost::math::cdf(boost::math::normal(), z);
}

}  // namespace

Spread ReadingLater(double reading, double deviation, double scans, double later) {
  if (later <= scans) return {reading, 0};
  const double ratio = later / scans;
  const double variance = ratio - 1 + ratio * std::max(deviation * deviation - 1, 0.0);
  return {reading * std::sqrt(ratio), std::sqrt(variance)};
}

double ScansForTarget(double target, double truth, double scans) {
  if (truth <= 0) return std::numeric_limits<double>::infinity();
  return scans * (target / truth) * (target / truth);
}

double ChanceOfReading(double threshold, double reading, double deviation, double scans,
                       double later) {
  const Spread spread = ReadingLater(reading, deviation, scans, later);
  if (spread.deviation == 0) return spread.centre >= threshold ? 1 : 0;
  return ProbabilityBelow((spread.centre - threshold) / spread.deviation);
}

double ChanceOfReading(double threshold, const AmplitudePosterior& unseen, double scans,
                       double later) {
  if (later <= scans) return 0;
  const double ratio = later / scans;
  // The later reading holds the noise of now, thinned, and the noise to come.
  const double deviation = std::sqrt(1 - 1 / ratio);
  return unseen.Expect([&](double truth, double reading) {
    const double centre = truth * std::sqrt(ratio) + (reading - truth) / std::sqrt(ratio);
    return ProbabilityBelow((centre - threshold) / deviation);
  });
}

}  // namespace lastscan::engine
