#include "engine/physics/nuclides.h"

#include <algorithm>
#include <array>
#include <cmath>
#include <numbers>

namespace lastscan::engine {
namespace {

constexpr std::array kNuclides = {
    Nuclide{"1H", 0.5, 26.7522128e7, 0.999885, 100.000000},
    Nuclide{"2H", 1.0, 4.10662791e7, 0.000115, 15.350609},
    Nuclide{"11B", 1.5, 8.5847044e7, 0.801, 32.083974},
    Nuclide{"13C", 0.5, 6.728284e7, 0.0107, 25.145020},
    Nuclide{"15N", 0.5, -2.71261804e7, 0.00368, 10.136767},
    Nuclide{"17O", 2.5, -3.62808e7, 0.00038, 13.556457},
    Nuclide{"19F", 0.5, 25.18148e7, 1.0, 94.094011},
    Nuclide{"23Na", 1.5, 7.0808493e7, 1.0, 26.451900},
    Nuclide{"27Al", 2.5, 6.9762715e7, 1.0, 26.056859},
    Nuclide{"29Si", 0.5, -5.3190e7, 0.046832, 19.867187},
    Nuclide{"31P", 0.5, 10.8394e7, 1.0, 40.480742},
    Nuclide{"77Se", 0.5, 5.1253857e7, 0.0763, 19.071513},
    Nuclide{"103Rh", 0.5, -0.8468e7, 1.0, 3.186447},
    Nuclide{"113Cd", 0.5, -5.9609155e7, 0.1222, 22.193175},
    Nuclide{"119Sn", 0.5, -10.0317e7, 0.0859, 37.290632},
    Nuclide{"183W", 0.5, 1.1282403e7, 0.1431, 4.166387},
    Nuclide{"195Pt", 0.5, 5.8385e7, 0.33832, 21.496784},
};

constexpr const Nuclide& kProton = kNuclides[0];

}  // namespace

std::span<const Nuclide> Nuclides() { return kNuclides; }

const Nuclide* FindNuclide(std::string_view name) {
  const auto found = std::find_if(kNuclides.begin(), kNuclides.end(),
                                  [&](const Nuclide& nuclide) { return nuclide.name == name; });
  return found == kNuclides.end() ? nullptr : &*found;
}

double Receptivity(const Nuclide& nuclide) {
  const auto strength = [](const Nuclide& of) {
    return std::pow(std::abs(of.magnetogyric_ratio), 3) * of.spin * (of.spin + 1) * of.abundance;
  };
  return strength(nuclide) / strength(kProton);
}

double FieldTesla(const Nuclide& nuclide, double observe_frequency_mhz) {
  return 2 * std::numbers::pi * observe_frequency_mhz * 1e6 / std::abs(nuclide.magnetogyric_ratio);
}

double LargestOverhauserFactor(const Nuclide& nuclide) {
  if (nuclide.name == kProton.name) return 1;
  return 1 + kProton.magnetogyric_ratio / (2 * nuclide.magnetogyric_ratio);
}

}  // namespace lastscan::engine
