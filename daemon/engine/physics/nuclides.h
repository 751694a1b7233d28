// The nuclides that are observed: spin, magnetogyric ratio, abundance and
// frequency ratio, and what follows from them.
//
// Source: Harris et al., Pure Appl. Chem. 2001, 73, 1795, tables 1 to 3 (IUPAC;
// kept in the recommendations of 2008, ibid. 80, 59). Written from memory and
// compared with one public transcription, the original was not seen;
// tests/unit/physics checks each row against the others.
#pragma once

#include <span>
#include <string_view>

namespace lastscan::engine {

// CODATA 2018 and the SI of 2019 (exact); from memory.
inline constexpr double kPlanckOver2Pi = 1.054571817e-34;  // J s
inline constexpr double kBoltzmann = 1.380649e-23;         // J/K

struct Nuclide {
  std::string_view name;      // mass number and symbol: "13C"
  double spin = 0;            // 1/2, 1, 3/2, ...
  double magnetogyric_ratio;  // rad/(s T), with its sign, free nucleus
  double abundance;           // natural, 0..1
  double frequency_ratio;     // per cent of the protons of tetramethylsilane
};

std::span<const Nuclide> Nuclides();

// Null for a nuclide that is not in the table.
const Nuclide* FindNuclide(std::string_view name);

// Signal of equally many molecules at natural abundance in the same field, over
// that of protons: |gamma|^3 I(I+1) abundance, relative to 1H.
double Receptivity(const Nuclide& nuclide);

// Field in tesla in which the nuclide is observed at this frequency.
// REQUIRES: observe_frequency_mhz > 0.
double FieldTesla(const Nuclide& nuclide, double observe_frequency_mhz);

// The most that saturating the protons can do to the signal of the nuclide:
// 1 + gamma(1H) / (2 gamma), reached where dipolar relaxation by the protons and
// fast tumbling rule. Negative for negative magnetogyric ratios; 1 for protons.
// Kuhlmann, Grant and Harris, J. Chem. Phys. 1970, 52, 3439; from memory.
double LargestOverhauserFactor(const Nuclide& nuclide);

}  // namespace lastscan::engine
