#include "engine/advice/goal.h"

#include <algorithm>
#include <cmath>
#include <cstdio>

#include "engine/refusal.h"
#include "engine/sensitivity/solvents.h"

namespace lastscan::engine {
namespace {

std::string Number(double value) {
  char text[32];
  std::snprintf(text, sizeof text, "%.6g", value);
  return text;
}

std::string Range(const v1::ShiftRange& range) {
  return Number(range.low_ppm()) + " to " + Number(range.high_ppm()) + " ppm";
}

void CheckRange(const v1::ShiftRange& range, const std::string& what, const std::string& where) {
  if (!std::isfinite(range.low_ppm()) || !std::isfinite(range.high_ppm()) ||
      range.low_ppm() >= range.high_ppm()) {
    throw Refusal(what + " " + Range(range) + " in " + where +
                  " is not a range: give the lower shift first, then the higher");
  }
}

std::vector<BinRange> Without(BinRange range, const std::vector<BinRange>& excluded) {
  std::vector<BinRange> left = {range};
  for (const BinRange& gap : excluded) {
    if (gap.empty()) continue;
    std::vector<BinRange> next;
    for (const BinRange& part : left) {
      const BinRange below{part.first, std::min(part.last, gap.first - 1)};
      const BinRange above{std::max(part.first, gap.last + 1), part.last};
      if (!below.empty()) next.push_back(below);
      if (!above.empty()) next.push_back(above);
    }
    left = std::move(next);
  }
  return left;
}

}  // namespace

v1::NucleusDefaults DefaultsFor(const v1::EngineSettings& settings, const std::string& nucleus) {
  for (const std::string& name : {nucleus, std::string("*")}) {
    for (const v1::NucleusDefaults& defaults : settings.nuclei()) {
      if (defaults.nucleus() == name) return defaults;
    }
  }
  return {};
}

v1::Goal CompletedGoal(const v1::Goal& asked, const v1::Goal& defaults) {
  v1::Goal goal = asked;
  if (goal.kind() == v1::GOAL_KIND_UNSPECIFIED) {
    if (goal.windows_size() > 0) {
      goal.set_kind(v1::WEAKEST_WINDOW);
    } else if (goal.lines() > 0) {
      goal.set_kind(v1::LINE_COUNT);
    } else {
      goal.set_kind(defaults.kind());
      *goal.mutable_windows() = defaults.windows();
    }
  }
  if (goal.target() == 0) goal.set_target(defaults.target());
  if (goal.convention() == v1::CONVENTION_UNSPECIFIED) goal.set_convention(defaults.convention());
  if (goal.assurance() == 0) goal.set_assurance(defaults.assurance());
  if (!goal.has_tolerance()) goal.set_tolerance(defaults.tolerance());
  if (!goal.has_broadening_hz()) goal.set_broadening_hz(defaults.broadening_hz());
  if (goal.kind() == v1::LINE_COUNT && goal.lines() == 0) {
    goal.set_lines(std::max(defaults.lines(), 1u));
  }
  if (goal.excluded().empty()) *goal.mutable_excluded() = defaults.excluded();
  if (goal.solvent().empty()) goal.set_solvent(defaults.solvent());
  return goal;
}

void CheckGoal(const v1::Goal& goal, const std::string& where) {
  if (!(goal.target() > 0) || !std::isfinite(goal.target())) {
    throw Refusal("target " + Number(goal.target()) + " in " + where +
                  " is not a signal-to-noise ratio: give a number above 0");
  }
  if (!(goal.assurance() >= 0.5 && goal.assurance() < 1)) {
    throw Refusal("assurance " + Number(goal.assurance()) + " in " + where +
                  " is out of range: give a probability from 0.5 to below 1");
  }
  if (!(goal.tolerance() >= 0 && goal.tolerance() < 0.9)) {
    throw Refusal("tolerance " + Number(goal.tolerance()) + " in " + where +
                  " is out of range: give a fraction from 0 to below 0.9");
  }
  if (!(goal.broadening_hz() >= 0) || !std::isfinite(goal.broadening_hz())) {
    throw Refusal("broadening " + Number(goal.broadening_hz()) + " Hz in " + where +
                  " is out of range: give 0 or more");
  }
  for (const auto& range : goal.windows()) CheckRange(range, "window", where);
  for (const auto& range : goal.excluded()) CheckRange(range, "excluded range", where);
  switch (goal.kind()) {
    case v1::WEAKEST_WINDOW:
      if (goal.windows().empty()) {
        throw Refusal(where + " asks for the weakest window but names none: give at least one");
      }
      break;
    case v1::KNOWN_LINE:
      if (goal.windows_size() != 1) {
        throw Refusal(where + " asks for one known line: give exactly one window around it");
      }
      break;
    case v1::LINE_COUNT:
      break;
    default:
      throw Refusal(where + " is of no known kind: name windows or a number of lines");
  }
}

SearchRegions RegionsOf(const v1::Goal& goal, const std::string& nucleus, const Axis& axis) {
  std::vector<BinRange> excluded;
  for (const auto& range : goal.excluded()) excluded.push_back(axis.BinsOf(range));
  if (!goal.solvent().empty()) {
    for (const auto& range : SolventRanges(goal.solvent(), nucleus)) {
      excluded.push_back(axis.BinsOf(range));
    }
  }
  const double first = axis.PpmAt(0);
  const double last = axis.PpmAt(static_cast<double>(axis.bins - 1));
  SearchRegions regions;
  for (const auto& window : goal.windows()) {
    if (window.low_ppm() < first || window.high_ppm() > last) {
      throw Refusal("window " + Range(window) + " reaches outside the spectrum, which covers " +
                    Number(first) + " to " + Number(last) +
                    " ppm: mend the window or the shift at the centre");
    }
    regions.windows.push_back(Without(axis.BinsOf(window), excluded));
    if (CountOf(regions.windows.back()) < 3) {
      throw Refusal("nothing is left of window " + Range(window) +
                    " once excluded ranges are taken out: widen it or exclude less");
    }
  }
  regions.everywhere = Without({0, axis.bins - 1}, excluded);
  if (CountOf(regions.everywhere) < 3) {
    throw Refusal("the excluded ranges cover the whole spectrum: exclude less");
  }
  return regions;
}

}  // namespace lastscan::engine
