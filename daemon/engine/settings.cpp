#include "engine/settings.h"

#include <cstdio>
#include <string>

#include "engine/advice/goal.h"
#include "engine/refusal.h"
#include "engine/run.h"

namespace lastscan::engine {
namespace {

void AddNucleus(v1::EngineSettings& settings, const char* nucleus, double broadening_hz) {
  v1::NucleusDefaults& defaults = *settings.add_nuclei();
  defaults.set_nucleus(nucleus);
  defaults.set_phase_cycle(1);
  v1::Goal& goal = *defaults.mutable_goal();
  goal.set_kind(v1::LINE_COUNT);
  goal.set_lines(1);
  goal.set_target(10);  // the quantitation limit of ICH Q2: 10 to 1
  goal.set_convention(v1::HEIGHT_OVER_RMS);
  goal.set_assurance(0.95);
  goal.set_tolerance(0.10);
  goal.set_broadening_hz(broadening_hz);
}

void CheckBetween(double value, double low, double high, const char* what) {
  if (value > low && value < high) return;
  char text[160];
  std::snprintf(text, sizeof text, "%s is %.6g: give a value above %.6g and below %.6g", what,
                value, low, high);
  throw Refusal(text);
}

}  // namespace

v1::EngineSettings DefaultSettings() {
  v1::EngineSettings settings;
  AddNucleus(settings, "13C", 1.0);
  AddNucleus(settings, "1H", 0.3);
  AddNucleus(settings, "*", 1.0);
  settings.set_false_confirmation(0.01);
  settings.set_out_of_reach_chance(0.05);
  settings.set_longest_extension(4);
  return settings;
}

void CheckSettings(const v1::EngineSettings& settings) {
  CheckBetween(settings.false_confirmation(), 0, 0.5, "false_confirmation");
  CheckBetween(settings.out_of_reach_chance(), 0, 0.5, "out_of_reach_chance");
  CheckBetween(settings.longest_extension(), 0.999999, 1e6, "longest_extension");
  for (const v1::NucleusDefaults& defaults : settings.nuclei()) {
    CheckGoal(defaults.goal(), "the default goal of " + defaults.nucleus());
  }
}

void CheckBroadening(double before, double now, const v1::Snapshot& snapshot) {
  if (before == now) return;
  char text[96];
  std::snprintf(text, sizeof text, " changed from %.6g to %.6g Hz", before, now);
  throw Refusal("broadening of run '" + snapshot.run() + "'" + text +
                ": send its snapshots again under a new run name");
}

}  // namespace lastscan::engine
