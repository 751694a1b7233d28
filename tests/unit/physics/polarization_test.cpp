// Polarization against the populations summed level by level, against the
// closed form of spin 1/2 and against limits.
#include "engine/physics/polarization.h"

#include <gtest/gtest.h>

#include <cmath>
#include <numbers>

namespace lastscan::engine {
namespace {

// Mean of m over I, from the Boltzmann factors in long double. At 1e-5 the
// sum of +m and -m loses five of its nineteen digits: enough are left.
double FromLevels(const Nuclide& nuclide, double field, double temperature) {
  const long double step = std::abs(static_cast<long double>(nuclide.magnetogyric_ratio)) *
                           kPlanckOver2Pi * field / (kBoltzmann * temperature);
  const auto levels = std::lround(2 * nuclide.spin) + 1;
  long double sum = 0;
  long double moment = 0;
  for (long level = 0; level < levels; ++level) {
    const long double m = static_cast<long double>(nuclide.spin) - level;
    const long double share = std::exp(step * m);
    sum += share;
    moment += m * share;
  }
  return static_cast<double>(moment / sum / nuclide.spin);
}

TEST(Polarization, OfProtonsInAnEverydayMagnet) {
  // 400 MHz: h nu = 6.62607015e-34 x 4e8 = 2.650428e-25 J; k x 298.15 K =
  // 4.116405e-21 J; half their quotient 3.21935e-5.
  const Nuclide& proton = *FindNuclide("1H");
  const double field = FieldTesla(proton, 400);
  EXPECT_NEAR(Polarization(proton, field, 298.15) / 3.21935e-5, 1, 2e-6);
  const auto populations = LevelPopulations(proton, field, 298.15);
  ASSERT_EQ(populations.size(), 2u);
  // 50.0016 % against 49.9984 %.
  EXPECT_NEAR(populations[0], 0.5000161, 1e-7);
  EXPECT_NEAR(populations[0] + populations[1], 1, 1e-15);
}

TEST(Polarization, IsTheMeanOverTheLevels) {
  for (const Nuclide& nuclide : Nuclides()) {
    for (const double temperature : {298.15, 4.2, 0.1, 0.001}) {
      const double expected = FromLevels(nuclide, 9.4, temperature);
      EXPECT_NEAR(Polarization(nuclide, 9.4, temperature) / expected, 1, 1e-11)
          << nuclide.name << " at " << temperature << " K";
    }
  }
}

TEST(Polarization, SpinHalfIsAHyperbolicTangent) {
  const Nuclide& carbon = *FindNuclide("13C");
  for (const double temperature : {300.0, 1.0, 0.01, 0.001}) {
    const double half =
        0.5 * carbon.magnetogyric_ratio * kPlanckOver2Pi * 11.7 / (kBoltzmann * temperature);
    EXPECT_NEAR(Polarization(carbon, 11.7, temperature) / std::tanh(half), 1, 1e-12);
  }
}

TEST(Polarization, HotIsCurieAndColdIsComplete) {
  // Curie: gamma hbar (I+1) B / (3 k T), the leading term.
  const Nuclide& sodium = *FindNuclide("23Na");
  const double curie =
      sodium.magnetogyric_ratio * kPlanckOver2Pi * (sodium.spin + 1) * 9.4 / (3 * kBoltzmann * 298);
  EXPECT_NEAR(Polarization(sodium, 9.4, 298) / curie, 1, 1e-9);
  EXPECT_NEAR(Polarization(sodium, 9.4, 1e-5), 1, 1e-9);
  EXPECT_EQ(Polarization(sodium, 0, 298), 0);
}

}  // namespace
}  // namespace lastscan::engine
