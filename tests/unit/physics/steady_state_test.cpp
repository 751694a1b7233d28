// The steady state against the spins themselves: pulse, relax, again.
#include "engine/physics/steady_state.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

namespace lastscan::engine {
namespace {

double ByRepetition(double flip_degrees, double repetition, double t1) {
  const double flip = flip_degrees * std::numbers::pi / 180;
  const double decay = std::exp(-repetition / t1);
  double longitudinal = 1;
  for (int scan = 0; scan < 100000; ++scan) {
    longitudinal = 1 + (longitudinal * std::cos(flip) - 1) * decay;
  }
  return longitudinal * std::sin(flip);
}

TEST(SteadyState, IsWhereRepetitionEnds) {
  for (const double flip : {10.0, 30.0, 45.0, 90.0, 120.0}) {
    for (const double repetition : {0.05, 0.7, 2.5, 20.0}) {
      EXPECT_NEAR(SteadyStateSignal(flip, repetition, 3.0) / ByRepetition(flip, repetition, 3.0), 1,
                  1e-9)
          << flip << " degrees, " << repetition << " s";
    }
  }
}

TEST(SteadyState, BestFlipAngleIsBest) {
  for (const double repetition : {0.01, 0.3, 2.5, 9.0}) {
    const double best = BestFlipAngleDegrees(repetition, 3.0);
    const double signal = SteadyStateSignal(best, repetition, 3.0);
    for (double flip = 0.5; flip < 180; flip += 0.5) {
      EXPECT_LE(SteadyStateSignal(flip, repetition, 3.0), signal * (1 + 1e-12)) << flip;
    }
    // There the signal is sqrt((1 - E) / (1 + E)) = sqrt(tanh(repetition / 2 T1)).
    EXPECT_NEAR(signal, std::sqrt(std::tanh(repetition / 6)), 1e-12);
  }
}

// Common practice, no source: about 70 degrees at 1.1 T1, and with 90 degrees
// pulses the most signal-to-noise in a given time at 1.2564 T1, where
// 1 + 2 x = exp(x).
TEST(SteadyState, BestRepetitionOfRightAngles) {
  EXPECT_NEAR(BestFlipAngleDegrees(1.1, 1.0), 70.6, 0.1);
  double best = 0;
  double highest = 0;
  for (double repetition = 0.5; repetition < 3; repetition += 1e-4) {
    const double in_time = SteadyStateSignal(90, repetition, 1.0) / std::sqrt(repetition);
    if (in_time > highest) {
      highest = in_time;
      best = repetition;
    }
  }
  EXPECT_NEAR(best, 1.2564, 2e-4);
}

TEST(SteadyState, FastRepetitionLosesNoDigits) {
  // With r = repetition / T1 = 1e-9 the angle is sqrt(2 r), the signal sqrt(r / 2).
  EXPECT_NEAR(BestFlipAngleDegrees(1e-9, 1) * std::numbers::pi / 180 / std::sqrt(2e-9), 1, 1e-8);
  EXPECT_NEAR(SteadyStateSignal(BestFlipAngleDegrees(1e-9, 1), 1e-9, 1) / std::sqrt(0.5e-9), 1,
              1e-8);
}

}  // namespace
}  // namespace lastscan::engine
