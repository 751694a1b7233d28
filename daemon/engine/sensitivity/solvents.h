// Where the lines of common deuterated NMR solvents lie.
#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

// The ranges that the lines of `solvent` (and, for protons, of water in it)
// take up, wide enough for the multiplets that deuterium makes. Names are
// compared without regard to case, blanks, hyphens and underscores: "CDCl3",
// "chloroform-d", "DMSO-d6", "dmso_d6". Empty when this nucleus has no lines of
// the solvent (15N, 29Si and the like).
// Source: Fulmer et al., Organometallics 2010, 29, 2176, tables 1 and 2; values
// written from memory, rounded to 0.01 ppm (1H) and 0.1 ppm (13C).
// Throws Refusal naming the known solvents when it is not one of them.
std::vector<v1::ShiftRange> SolventRanges(std::string_view solvent, std::string_view nucleus);

// The names SolventRanges knows, for help texts, separated by commas.
std::string KnownSolvents();

}  // namespace lastscan::engine
