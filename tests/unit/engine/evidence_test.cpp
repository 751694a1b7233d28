// The evidence that a line is there: a martingale of mean 1 on blanks, so that
// a blank is ever confirmed as rarely as was asked for, however often one looks.
#include "engine/sensitivity/evidence.h"

#include <gtest/gtest.h>

#include <boost/math/quadrature/gauss_kronrod.hpp>
#include <cmath>
#include <limits>
#include <numbers>

#include "unit/engine/limits.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

constexpr double kRho = 16;

TEST(MixtureEvidence, HasMeanOneOnABlankAfterAnyNumberOfScans) {
  // By integration over what a blank reads: normal of a real bin, the density
  // z exp(-z^2/2) of a magnitude.
  using Integral = boost::math::quadrature::gauss_kronrod<double, 61>;
  for (const double scans : {1.0, 16.0, 100.0, 1e4}) {
    const MixtureEvidence real(scans, kRho, 1);
    const MixtureEvidence magnitude(scans, kRho, 2);
    const double reach = 12 * std::sqrt((scans + kRho) / kRho);  // the mixture's own width
    const double of_real = Integral::integrate(
        [&](double z) {
          return 2 * std::exp(real.LogEvidence(z) - 0.5 * z * z) / std::sqrt(2 * std::numbers::pi);
        },
        0.0, reach, 15, 1e-12);
    const double of_magnitude = Integral::integrate(
        [&](double z) { return z * std::exp(magnitude.LogEvidence(z) - 0.5 * z * z); }, 0.0, reach,
        15, 1e-12);
    EXPECT_NEAR(of_real, 1, 1e-9) << scans;
    EXPECT_NEAR(of_magnitude, 1, 1e-9) << scans;
  }
}

TEST(MixtureEvidence, HasMeanOneOnDrawnBlanks) {
  // Few enough scans that the evidence has a variance: with g = n / (2 (n +
  // rho)), that of one quadrature is rho/(n+rho) / sqrt(1 - 4g) - 1.
  constexpr int kDraws = 200000;
  const double scans = 0.4 * kRho;
  const double gain = 0.5 * scans / (scans + kRho);
  for (const int quadratures : {1, 2}) {
    const MixtureEvidence evidence(scans, kRho, quadratures);
    Noise noise(71);
    double mean = 0;
    for (int draw = 0; draw < kDraws; ++draw) {
      const double z = quadratures == 1 ? noise.Next() : std::abs(noise.NextComplex());
      mean += std::exp(evidence.LogEvidence(z)) / kDraws;
    }
    const double second = std::pow(kRho / (scans + kRho) / std::sqrt(1 - 4 * gain), quadratures);
    EXPECT_LT(std::abs(mean - 1), 3.29 * std::sqrt((second - 1) / kDraws)) << quadratures;
  }
}

TEST(MixtureEvidence, IsAMartingale) {
  // Given where a blank stands, the mean evidence after more scans is what it
  // is now: B(n) = b leads to normal B(N) about b of variance N - n.
  using Integral = boost::math::quadrature::gauss_kronrod<double, 61>;
  const double now = 20;
  const double later = 35;
  for (const double b : {0.0, 5.0, 20.0}) {
    const MixtureEvidence after(later, kRho, 1);
    const double deviation = std::sqrt(later - now);
    const double mean = Integral::integrate(
        [&](double x) {
          const double step = (x - b) / deviation;
          return std::exp(after.LogEvidence(x / std::sqrt(later)) - 0.5 * step * step) /
                 (deviation * std::sqrt(2 * std::numbers::pi));
        },
        b - 60.0, b + 60.0, 15, 1e-12);
    const double before = std::exp(MixtureEvidence(now, kRho, 1).LogEvidence(b / std::sqrt(now)));
    EXPECT_NEAR(mean, before, 1e-8 * before) << b;
  }
}

TEST(MixtureEvidence, ReadingAtIsItsInverse) {
  for (const int quadratures : {1, 2}) {
    for (const double scans : {3.0, 64.0, 5000.0}) {
      const MixtureEvidence evidence(scans, kRho, quadratures);
      for (const double level : {1.0, 100.0, 1e7}) {
        EXPECT_NEAR(evidence.LogEvidence(evidence.ReadingAt(level)), std::log(level), 1e-9);
      }
    }
  }
  // A level below what no signal at all gives is reached by any reading.
  EXPECT_EQ(MixtureEvidence(1e6, kRho, 2).ReadingAt(1e-9), 0);
}

TEST(MixtureEvidence, ABlankWindowIsEverConfirmedAsRarelyAsAsked) {
  constexpr int kRuns = 1000;
  constexpr int kLooks = 200;
  constexpr int kBins = 24;
  constexpr double kAlpha = 0.05;
  int confirmed = 0;
  Noise noise(72);
  for (int run = 0; run < kRuns; ++run) {
    Points sum(kBins);
    for (int look = 1; look <= kLooks; ++look) {
      noise.AddTo(sum, 2);  // four scans
      const double scans = 4 * look;
      const MixtureEvidence evidence(scans, kRho, 2);
      double mean = 0;
      for (const Complex& bin : sum) {
        mean += std::exp(evidence.LogEvidence(std::abs(bin) / std::sqrt(scans))) / kBins;
      }
      if (mean < 1 / kAlpha) continue;
      ++confirmed;
      break;
    }
  }
  EXPECT_LE(confirmed, MostHits(kRuns, kAlpha));
  EXPECT_GT(confirmed, 0) << "or the bound is no bound at all";
}

TEST(MixtureEvidence, ALineIsConfirmedInTheEnd) {
  for (const double per_scan : {0.05, 0.5}) {
    double scans = 4;
    while (MixtureEvidence(scans, kRho, 2).LogEvidence(per_scan * std::sqrt(scans)) <
           std::log(1e6)) {
      scans *= 2;
      ASSERT_LT(scans, 1e6);
    }
  }
}

}  // namespace
}  // namespace lastscan::engine
