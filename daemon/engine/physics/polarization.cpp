#include "engine/physics/polarization.h"

#include <cmath>

namespace lastscan::engine {
namespace {

// Energy between neighbouring levels over k T.
double StepOverThermal(const Nuclide& nuclide, double field_tesla, double temperature_k) {
  return std::abs(nuclide.magnetogyric_ratio) * kPlanckOver2Pi * field_tesla /
         (kBoltzmann * temperature_k);
}

// coth x - 1/x, without the loss of digits near 0.
double Langevin(double x) {
  if (x < 0.05) return x / 3 * (1 - x * x / 15 * (1 - 2 * x * x / 21 * (1 - x * x / 10)));
  return 1 / std::tanh(x) - 1 / x;
}

}  // namespace

std::vector<double> LevelPopulations(const Nuclide& nuclide, double field_tesla,
                                     double temperature_k) {
  const double step = StepOverThermal(nuclide, field_tesla, temperature_k);
  std::vector<double> populations(static_cast<std::size_t>(std::lround(2 * nuclide.spin)) + 1);
  double sum = 0;
  for (std::size_t level = 0; level < populations.size(); ++level) {
    populations[level] = std::exp(-step * static_cast<double>(level));
    sum += populations[level];
  }
  for (double& population : populations) population /= sum;
  return populations;
}

double Polarization(const Nuclide& nuclide, double field_tesla, double temperature_k) {
  // The Brillouin function is (2I+1)/(2I) coth((2I+1) s/2) - 1/(2I) coth(s/2),
  // s the step; the poles of the two terms cancel, so they are left out of both.
  const double half = 0.5 * StepOverThermal(nuclide, field_tesla, temperature_k);
  const double levels = 2 * nuclide.spin + 1;
  return (levels * Langevin(levels * half) - Langevin(half)) / (2 * nuclide.spin);
}

}  // namespace lastscan::engine
