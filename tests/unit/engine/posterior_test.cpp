// What is known of a true signal-to-noise: quantiles against integrals done
// another way, and limits that hold the truth as often as they say.
#include "engine/sensitivity/posterior.h"

#include <gtest/gtest.h>

#include <boost/math/quadrature/gauss_kronrod.hpp>
#include <boost/math/special_functions/bessel.hpp>
#include <cmath>
#include <numbers>

#include "engine/sensitivity/survey.h"
#include "unit/engine/limits.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

using Integral = boost::math::quadrature::gauss_kronrod<double, 61>;

// The share of `density` on 0..last that lies below `value`.
template <typename Density>
double ShareBelow(double value, double last, Density density) {
  const double below = Integral::integrate(density, 0.0, value, 15, 1e-12);
  return below / (below + Integral::integrate(density, value, last, 15, 1e-12));
}

TEST(AmplitudePosterior, QuantilesOfALineAreThoseOfItsDensity) {
  for (const double z : {8.0, 12.0, 150.0}) {
    for (const double chosen : {0.0, 1.0, 2.0}) {
      for (const double deviation : {1.0, 1.7}) {
        const auto posterior = AmplitudePosterior::OfLine(z, chosen, deviation);
        // The density falls off within 7 deviations; there the grid ends.
        const double first = std::max(0.0, z - 7 * deviation);
        const auto density = [&](double a) {
          const double distance = (a - z) / deviation;
          return a < first || a <= 0
                     ? 0.0
                     : std::exp(-0.5 * distance * distance) * std::pow(a / z, -0.5 * chosen);
        };
        for (const double probability : {0.025, 0.25, 0.5, 0.975}) {
          // The grid has 400 steps; a quantile read from it lies within a
          // hundredth of a deviation, so its probability within 0.004.
          const double quantile = posterior.Quantile(probability);
          EXPECT_NEAR(ShareBelow(quantile, z + 8 * deviation, density), probability, 0.004)
              << z << ' ' << chosen << ' ' << deviation;
        }
      }
    }
  }
}

TEST(AmplitudePosterior, LiesAroundTheReadingFreedOfWhatWasChosen) {
  for (const double z : {10.0, 40.0}) {
    const auto posterior = AmplitudePosterior::OfLine(z, 2, 1);
    // Laplace: centred near sqrt(z^2 - 2), about 1/z below the reading.
    EXPECT_NEAR(posterior.Quantile(0.5), std::sqrt(z * z - 2), 0.02);
    EXPECT_NEAR(posterior.Expect([](double a) { return a; }), std::sqrt(z * z - 2), 0.02);
  }
}

TEST(AmplitudePosterior, OfUnseenIsTheSumOverAllPlaces) {
  const std::vector<float> readings = {0.3F, -1.2F, 2.9F, 1.1F, -2.0F, 2.2F, 0.0F};
  const auto posterior = AmplitudePosterior::OfUnseen(readings, 1);
  const auto density = [&](double a) {
    double sum = 0;
    for (const float x : readings) sum += std::exp(a * x - 0.5 * a * a);
    return sum;
  };
  // Readings are counted in cells of 0.04 and amplitudes in steps of 0.1.
  for (const double probability : {0.1, 0.5, 0.975}) {
    EXPECT_NEAR(ShareBelow(posterior.Quantile(probability), 12, density), probability, 0.02);
  }
  const std::vector<float> magnitudes = {0.3F, 1.2F, 2.9F, 1.1F, 2.0F, 2.2F};
  const auto of_magnitudes = AmplitudePosterior::OfUnseen(magnitudes, 2);
  const auto magnitude_density = [&](double a) {
    double sum = 0;
    for (const float x : magnitudes) {
      sum += boost::math::cyl_bessel_i(0, a * x) * std::exp(-0.5 * a * a);
    }
    return sum;
  };
  for (const double probability : {0.1, 0.5, 0.975}) {
    EXPECT_NEAR(ShareBelow(of_magnitudes.Quantile(probability), 12, magnitude_density), probability,
                0.02);
  }
}

TEST(AmplitudePosterior, TheLimitOfABlankLiesAboveItsHighestBin) {
  Noise noise(111);
  for (int draw = 0; draw < 20; ++draw) {
    std::vector<float> readings;
    float highest = 0;
    for (int j = 0; j < 2000; ++j) {
      readings.push_back(static_cast<float>(std::abs(noise.NextComplex())));
      highest = std::max(highest, readings.back());
    }
    const auto posterior = AmplitudePosterior::OfUnseen(readings, 2);
    EXPECT_GT(posterior.Quantile(0.975), highest);
    EXPECT_LT(posterior.Quantile(0.975), highest + 4) << "but not out of reach of the noise";
  }
  // With no bins at all there is still an answer: nothing is known.
  EXPECT_GT(AmplitudePosterior::OfUnseen({}, 2).Quantile(0.975), 1);
}

TEST(AmplitudePosterior, QuantilesRise) {
  const auto posterior = AmplitudePosterior::OfLine(9, 2, 1.2);
  double before = posterior.Quantile(0.001);
  for (double probability = 0.01; probability < 1; probability += 0.01) {
    EXPECT_GT(posterior.Quantile(probability), before);
    before = posterior.Quantile(probability);
  }
}

// The highest magnitude of one line and noise over all frequencies: a place and
// a phase chosen from the data. 32 points, so that the sum can be written out.
double HighestMagnitude(double truth, Noise& noise) {
  constexpr int kPoints = 32;
  Points fid(kPoints);
  AddLine(fid, truth / std::sqrt(kPoints), 0, 0);  // matched: all weights alike
  noise.AddTo(fid, 1);
  const auto at = [&](double cycles) {
    Complex sum = 0;
    const Complex step = std::polar(1.0, -2 * std::numbers::pi * cycles);
    Complex turn = 1;
    for (const Complex& point : fid) {
      sum += point * turn;
      turn *= step;
    }
    return std::abs(sum) / std::sqrt(kPoints);
  };
  double best = 0;
  double place = 0;
  for (int i = -8; i <= 8; ++i) {
    const double value = at(i / 8.0 / kPoints);
    if (value > best) {
      best = value;
      place = i / 8.0 / kPoints;
    }
  }
  for (double span = 1.0 / 16 / kPoints; span > 1e-4 / kPoints; span /= 2) {
    for (const double side : {-span, span}) {
      const double value = at(place + side);
      if (value <= best) continue;
      best = value;
      place += side;
      break;
    }
  }
  return best;
}

TEST(ReadingOf, LimitsHoldTheTruthNineteenTimesInTwenty) {
  constexpr int kDraws = 3000;
  for (const double truth : {6.0, 10.0, 25.0}) {
    Noise noise(112);
    int inside = 0;
    double mean = 0;
    for (int draw = 0; draw < kDraws; ++draw) {
      const Reading reading = ReadingOf(HighestMagnitude(truth, noise), 2, 0);
      inside += reading.lower <= truth && truth <= reading.upper ? 1 : 0;
      mean += reading.estimate / kDraws;
    }
    EXPECT_GE(inside, FewestHits(kDraws, 0.95)) << truth;
    EXPECT_LE(inside, MostHits(kDraws, 0.95)) << truth;
    EXPECT_LT(std::abs(mean / truth - 1), 0.02) << "bias of the reading";
  }
}

TEST(ReadingOf, NoiseThatIsNotSureWidensTheLimits) {
  const Reading exact = ReadingOf(40, 2, 0);
  EXPECT_EQ(exact.deviation, 1);
  EXPECT_DOUBLE_EQ(exact.estimate, std::sqrt(1600 - 2.0));
  const Reading unsure = ReadingOf(40, 2, 0.05);
  EXPECT_DOUBLE_EQ(unsure.deviation, std::sqrt(5));
  EXPECT_LT(unsure.lower, exact.lower);
  EXPECT_GT(unsure.upper, exact.upper);
  EXPECT_EQ(ReadingOf(1, 2, 0).estimate, 0) << "all of it can be choice";
}

}  // namespace
}  // namespace lastscan::engine
