#include "engine/sensitivity/solvents.h"

#include <algorithm>
#include <array>
#include <cctype>

#include "engine/refusal.h"

namespace lastscan::engine {
namespace {

constexpr int kMostLines = 4;

struct Solvent {
  std::array<std::string_view, 3> names;  // the first is the one we print
  std::array<double, kMostLines> carbon;  // ppm; 0: no further line
  std::array<double, kMostLines> proton;  // residual protons, then water
};

constexpr std::array kSolvents = {
    Solvent{{"CDCl3", "chloroform-d", "chloroformd1"}, {77.16}, {7.26, 1.56}},
    Solvent{{"DMSO-d6", "DMSO", "(CD3)2SO"}, {39.52}, {2.50, 3.33}},
    Solvent{{"CD3OD", "methanol-d4", "MeOD"}, {49.00}, {3.31, 4.87}},
    Solvent{{"D2O", "deuterium oxide", "heavy water"}, {}, {4.79}},
    Solvent{{"C6D6", "benzene-d6", ""}, {128.06}, {7.16, 0.40}},
    Solvent{{"acetone-d6", "(CD3)2CO", "acetone"}, {29.84, 206.26}, {2.05, 2.84}},
    Solvent{{"CD3CN", "acetonitrile-d3", ""}, {1.32, 118.26}, {1.94, 2.13}},
    Solvent{{"CD2Cl2", "dichloromethane-d2", ""}, {53.84}, {5.32, 1.52}},
    Solvent{{"THF-d8", "tetrahydrofuran-d8", ""}, {67.21, 25.31}, {1.72, 3.58, 2.46}},
    Solvent{{"toluene-d8", "C7D8", ""}, {137.48, 128.87, 127.96, 125.13}, {2.08, 6.97, 7.01, 7.09}},
    Solvent{{"C6D5Cl", "chlorobenzene-d5", ""},
            {134.19, 129.26, 128.25, 125.96},
            {6.96, 6.99, 7.14, 1.03}},
    Solvent{{"CF3CD2OD", "trifluoroethanol-d3", "TFE-d3"}, {61.50, 126.28}, {5.02, 3.88, 3.66}},
};

// Half the range around a line: 13C multiplets from up to six deuterons span
// some 120 Hz, 1.2 ppm at 100 MHz; residual proton lines are narrow, and the
// water line wanders with temperature.
constexpr double kCarbonHalfRange = 1.2;
constexpr double kProtonHalfRange = 0.06;

std::string Folded(std::string_view name) {
  std::string folded;
  for (char c : name) {
    if (c == ' ' || c == '-' || c == '_') continue;
    folded.push_back(static_cast<char>(std::tolower(static_cast<unsigned char>(c))));
  }
  return folded;
}

const Solvent* Find(std::string_view name) {
  const std::string wanted = Folded(name);
  for (const Solvent& solvent : kSolvents) {
    for (std::string_view known : solvent.names) {
      if (!known.empty() && Folded(known) == wanted) return &solvent;
    }
  }
  return nullptr;
}

}  // namespace

std::string KnownSolvents() {
  std::string names;
  for (const Solvent& solvent : kSolvents) {
    if (!names.empty()) names += ", ";
    names += solvent.names[0];
  }
  return names;
}

std::vector<v1::ShiftRange> SolventRanges(std::string_view name, std::string_view nucleus) {
  const Solvent* solvent = Find(name);
  if (solvent == nullptr) {
    throw Refusal("solvent '" + std::string(name) + "' is not known: name one of " +
                  KnownSolvents() + ", or exclude its lines by shift");
  }
  const bool carbon = nucleus == "13C";
  if (!carbon && nucleus != "1H") return {};
  const double half = carbon ? kCarbonHalfRange : kProtonHalfRange;
  std::vector<v1::ShiftRange> ranges;
  for (double shift : carbon ? solvent->carbon : solvent->proton) {
    if (shift == 0) continue;
    v1::ShiftRange& range = ranges.emplace_back();
    range.set_low_ppm(shift - half);
    range.set_high_ppm(shift + half);
  }
  return ranges;
}

}  // namespace lastscan::engine
