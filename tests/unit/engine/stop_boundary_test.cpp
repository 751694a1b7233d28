// The stop boundary against drawn Brownian motion and against reference values
// that were found by simulation before it was written.
#include "engine/forecast/stop_boundary.h"

#include <gtest/gtest.h>

#include <bit>
#include <boost/math/distributions/normal.hpp>
#include <cmath>
#include <thread>
#include <vector>

#include "unit/engine/limits.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

// How often drawn motions cross.
int CrossingsOf(int draws, const std::vector<double>& times, const std::vector<double>& upper,
                double drift, bool two_sided, std::uint64_t seed) {
  Noise noise(seed);
  int crossed = 0;
  for (int draw = 0; draw < draws; ++draw) {
    double b = 0;
    double t = 0;
    for (std::size_t k = 0; k < times.size(); ++k) {
      b += drift * (times[k] - t) + std::sqrt(times[k] - t) * noise.Next();
      t = times[k];
      const double z = b / std::sqrt(t);
      if (z < upper[k] && !(two_sided && z <= -upper[k])) continue;
      ++crossed;
      break;
    }
  }
  return crossed;
}

TEST(CrossingProbability, AgreesWithDrawnMotion) {
  constexpr int kDraws = 200000;
  const std::vector<double> even = {1, 2, 3, 4, 5, 6, 7, 8, 9, 10};
  const std::vector<double> uneven = {0.1, 0.5, 0.6, 2, 2.01, 7, 20};
  const std::vector<double> rising = {1.5, 1.6, 1.7, 1.8, 2, 2.2, 2.5};
  struct Case {
    std::vector<double> times;
    std::vector<double> upper;
    double drift;
    bool two_sided;
  };
  const std::vector<Case> cases = {{even, std::vector<double>(10, 2.0), 0, false},
                                   {even, std::vector<double>(10, 2.0), 0, true},
                                   {even, std::vector<double>(10, 3.0), 0.7, false},
                                   {uneven, std::vector<double>(7, 1.8), 0.2, false},
                                   {uneven, rising, -0.1, true},
                                   {{4}, {2.5}, 1, false}};
  for (std::size_t i = 0; i < cases.size(); ++i) {
    const Case& c = cases[i];
    const double p = CrossingProbability(c.times, c.upper, c.drift, c.two_sided);
    const int crossed = CrossingsOf(kDraws, c.times, c.upper, c.drift, c.two_sided, 130 + i);
    EXPECT_GE(crossed, FewestHits(kDraws, p)) << "case " << i << ", p " << p;
    EXPECT_LE(crossed, MostHits(kDraws, p)) << "case " << i << ", p " << p;
  }
}

TEST(CrossingProbability, OneLookIsANormalTail) {
  const boost::math::normal normal;
  for (const double bound : {0.5, 1.96, 4.0}) {
    const double tail = boost::math::cdf(boost::math::complement(normal, bound));
    EXPECT_NEAR(CrossingProbability(std::vector{3.0}, std::vector{bound}, 0, false), tail, 1e-12);
    EXPECT_NEAR(CrossingProbability(std::vector{3.0}, std::vector{bound}, 0, true), 2 * tail,
                1e-12);
  }
}

TEST(StopMargin, IsTheReferenceOfTheDesign) {
  // Our simulation of 20,000 runs, quoted to two digits: an error of 0.02.
  EXPECT_NEAR(StopMargin(2.7, 8, 0.05), 1.77, 0.02);
  EXPECT_NEAR(StopMargin(2.7, 32, 0.05), 1.84, 0.02);
  EXPECT_NEAR(StopMargin(2.7, 128, 0.05), 1.90, 0.02);
  EXPECT_NEAR(StopMargin(45, 32, 0.05), 1.64, 0.02);
  EXPECT_NEAR(StopMargin(2.7, 1, 0.05), 1.645, 0.001) << "one look: a normal quantile";
}

TEST(StopMargin, KeepsTheChanceItIsAskedFor) {
  // The worst run: it truly reaches the limit just after the last of 32 looks.
  constexpr int kDraws = 20000;
  for (const auto& [limit, chance] : {std::pair(4.5, 0.05), std::pair(9.0, 0.01)}) {
    const double margin = StopMargin(limit, 32, chance);
    std::vector<double> times;
    for (int k = 1; k <= 32; ++k) times.push_back(k / 32.0);
    const std::vector<double> upper(32, limit + margin);
    const int stopped = CrossingsOf(kDraws, times, upper, limit, false, 140);
    EXPECT_LE(stopped, MostHits(kDraws, chance)) << limit;
    EXPECT_GE(stopped, FewestHits(kDraws, chance)) << limit << ": no larger than it must be";
  }
}

TEST(StopMargin, RisesWithTheLooksAndFallsWithTheLimit) {
  double before = 0;
  for (const int looks : {1, 2, 8, 32, 128}) {
    const double margin = StopMargin(3, looks, 0.05);
    EXPECT_GT(margin, before) << looks;
    before = margin;
  }
  before = 10;
  for (const double limit : {1.0, 2.7, 4.5, 9.0, 20.0}) {
    const double margin = StopMargin(limit, 32, 0.05);
    EXPECT_LT(margin, before) << limit;
    before = margin;
  }
  EXPECT_GT(StopMargin(4.5, 8, 0.01), StopMargin(4.5, 8, 0.05));
}

TEST(StopMargins, RememberNothingSmallerThanTheMarginItself) {
  StopMargins margins;
  for (const double limit : {0.93, 2.7, 4.45, 17.3}) {
    for (const int looks : {1, 3, 8, 20, 32, 33}) {
      const double exact = StopMargin(limit, looks, 0.05);
      const double remembered = margins.At(limit, looks, 0.05);
      EXPECT_GE(remembered, exact - 2e-4) << limit << ' ' << looks;  // solved to 1e-4
      const double rounded = StopMargin(
          limit / 1.02, static_cast<int>(std::bit_ceil(static_cast<unsigned>(looks))), 0.05);
      EXPECT_LE(remembered, rounded + 2e-4) << "nor larger than the table's own steps";
    }
  }
}

TEST(StopMargins, HaveAnAnswerOutsideTheTable) {
  StopMargins margins;
  EXPECT_EQ(margins.At(1e5, 64, 0.05), margins.At(200, 64, 0.05));
  EXPECT_EQ(margins.At(0.01, 64, 0.05), margins.At(0.5, 64, 0.05));
  EXPECT_EQ(margins.At(20, 0.3, 0.05), margins.At(20, 1, 0.05)) << "less than one look is one";
}

TEST(StopMargins, ServeManyThreadsAlike) {
  StopMargins alone;
  StopMargins shared;
  std::vector<double> expected;
  for (int i = 0; i < 24; ++i) expected.push_back(alone.At(3 + i % 8, 1 << (i % 5), 0.05));
  std::vector<std::vector<double>> found(4);
  std::vector<std::thread> threads;
  for (std::size_t t = 0; t < found.size(); ++t) {
    threads.emplace_back([&, t] {
      for (int i = 0; i < 24; ++i) {
        const int turned = static_cast<int>((static_cast<std::size_t>(i) + 6 * t) % 24);
        found[t].push_back(shared.At(3 + turned % 8, 1 << (turned % 5), 0.05));
      }
    });
  }
  for (std::thread& thread : threads) thread.join();
  for (std::size_t t = 0; t < found.size(); ++t) {
    for (std::size_t i = 0; i < 24; ++i) EXPECT_EQ(found[t][i], expected[(i + 6 * t) % 24]);
  }
}

}  // namespace
}  // namespace lastscan::engine
