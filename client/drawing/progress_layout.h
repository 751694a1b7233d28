// What stands where in the figure of a run, before anything is drawn: the same
// for the terminal and for SVG. Horizontally the root of the number of scans,
// vertically the signal-to-noise: the root-of-scans law is then a straight line
// through the origin, and a run that leaves the law bends away from it.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <vector>

#include "drawing/progress_figure.h"

namespace lastscan::drawing {

// One point of the history. Unconfirmed: only `upper` is known.
struct Reading {
  double scans = 0;
  double estimate = 0;
  double lower = 0;
  double upper = 0;
  bool confirmed = false;
};

// A number of scans at which something happens.
struct Event {
  char letter;        // marks it on the terminal: S, P, B
  std::string label;  // "stop 264"
  double scans;
};

struct ProgressLayout {
  std::vector<Reading> readings;
  std::optional<Reading> law;          // the reading the law is drawn through
  std::optional<Reading> planned_end;  // forecast there
  std::optional<double> goal;
  std::vector<Event> events;  // in order of scans, all inside the axis
  double most_scans = 1;      // right edge
  double most_signal = 1;     // upper edge
  std::vector<std::uint64_t> scan_ticks;
  std::vector<double> signal_ticks;

  // Places on the axes, 0..1; values outside the axes are outside 0..1.
  double Across(double scans) const;
  double Up(double signal) const { return signal / most_signal; }
};

ProgressLayout LayOut(const ProgressFigure& figure);

}  // namespace lastscan::drawing
