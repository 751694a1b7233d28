// From what the sender asked to a goal that can be judged: defaults filled in,
// impossible values refused, shifts turned into bins.
#pragma once

#include <vector>

#include "engine/spectrum/axis.h"
#include "lastscan/v1/settings.pb.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

// The settings that serve `nucleus`: its own, else those of "*", else empty.
v1::NucleusDefaults DefaultsFor(const v1::EngineSettings& settings, const std::string& nucleus);

// `asked` with every field it leaves open taken from `defaults`. Windows make
// the kind WEAKEST_WINDOW and a number of lines LINE_COUNT where none is named.
v1::Goal CompletedGoal(const v1::Goal& asked, const v1::Goal& defaults);

// Throws Refusal for a target, assurance, tolerance, broadening or range that
// cannot be meant. `where` names the goal in the message: "the goal of run 'x'".
void CheckGoal(const v1::Goal& goal, const std::string& where);

// Where lines are looked for, in bins.
struct SearchRegions {
  std::vector<std::vector<BinRange>> windows;  // one a goal's window, exclusions cut out
  std::vector<BinRange> everywhere;            // the whole spectrum but exclusions
};

// Throws Refusal if a window lies outside the spectrum, or nothing is left of
// it or of the spectrum.
SearchRegions RegionsOf(const v1::Goal& goal, const std::string& nucleus, const Axis& axis);

}  // namespace lastscan::engine
