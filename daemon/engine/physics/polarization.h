// How far a field aligns nuclei: populations of the levels in thermal
// equilibrium (Boltzmann) and what the coil can see of them.
#pragma once

#include <vector>

#include "engine/physics/nuclides.h"

namespace lastscan::engine {

// Shares of the nuclei in the 2I+1 levels, lowest energy first; they add up
// to 1. REQUIRES: field_tesla >= 0, temperature_k > 0.
std::vector<double> LevelPopulations(const Nuclide& nuclide, double field_tesla,
                                     double temperature_k);

// Magnetization over that of nuclei all aligned, 0..1: the Brillouin function of
// gamma hbar I B / (k T); for spin 1/2 tanh(gamma hbar B / (2 k T)). Correct to
// rounding at the 1e-5 of every day as well as near 1.
// REQUIRES: field_tesla >= 0, temperature_k > 0.
double Polarization(const Nuclide& nuclide, double field_tesla, double temperature_k);

}  // namespace lastscan::engine
