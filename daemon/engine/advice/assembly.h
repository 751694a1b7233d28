// Puts an Advice together: every field of the message from what was found.
#pragma once

#include <string>
#include <vector>

#include "engine/advice/verdict.h"
#include "engine/spectrum/axis.h"
#include "lastscan/v1/advice.pb.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

// All that an advice is made of. Ratios in survey and outlook are height over
// the rms that the increments show; `factor` turns them into the goal's
// convention.
struct Matter {
  const v1::Snapshot* snapshot = nullptr;
  const v1::Goal* goal = nullptr;
  const Survey* survey = nullptr;
  const Axis* axis = nullptr;
  Case facts;  // `confirmed` is filled in by Assemble
  std::vector<v1::Finding> findings;
  std::string limiting_event;
  double factor = 1;
  double acquisition_seconds = 0;
  double seconds_per_scan = 0;  // 0: not known
  double noise_per_scan = 0;
  v1::Interval noise_growth;
  double window_excess = 1;
};

v1::Advice Assemble(Matter& matter);

// The broadening that would serve a line of natural width `width_hz` best, its
// own width (Ernst, Adv. Magn. Reson. 1966, 2, 1), and the factor that its
// height over noise gains against the broadening in use. Lorentzian line, FID
// of `acquisition_seconds`.
struct MatchedBroadening {
  double hz = 0;
  double gain = 1;
};
MatchedBroadening Matched(double width_hz, double broadening_hz, double acquisition_seconds);

}  // namespace lastscan::engine
