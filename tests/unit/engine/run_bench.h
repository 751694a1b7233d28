// Invented runs as a run of the engine is sent them, for its tests.
#pragma once

#include <gtest/gtest.h>

#include <cstdint>
#include <string>
#include <vector>

#include "engine/run.h"
#include "rehearsal/invented_run.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {

// One snapshot and its frame.
struct Sent {
  v1::Snapshot snapshot;
  std::string frame;
};

// One line of 2 Hz at 101.3 ppm between 90.06 and 109.94 ppm, 1,024 points, so
// strong after one scan.
inline rehearsal::InventedSample OneLine(double signal_to_noise_per_scan) {
  rehearsal::InventedSample sample;
  sample.run = "night 1";
  sample.sample = "invented";
  sample.spectral_width_hz = 2000;
  sample.points = 1024;
  sample.broadening_hz = 2;
  sample.phase_cycle = 8;
  sample.scans_planned = 1024;
  sample.lines = {{101.3, 2, signal_to_noise_per_scan}};
  return sample;
}

// Four lines behind a digital receiver: enough to settle delay and phase.
inline rehearsal::InventedSample FourLines(double signal_to_noise_per_scan) {
  rehearsal::InventedSample sample = OneLine(signal_to_noise_per_scan);
  sample.points = 2048;
  sample.receiver_delay_points = 67.98;
  sample.phase_radians = 1.2;
  sample.lines = {{91.7, 2, signal_to_noise_per_scan},
                  {96.13, 2, 0.8 * signal_to_noise_per_scan},
                  {101.3, 2, 0.7 * signal_to_noise_per_scan},
                  {107.91, 2, 1.3 * signal_to_noise_per_scan}};
  return sample;
}

// A goal for the line at 101.3 ppm.
inline v1::Goal WindowGoal(double target) {
  v1::Goal goal;
  goal.set_target(target);
  goal.set_broadening_hz(2);
  *goal.add_windows() = ShiftsFrom(100.8, 101.8);
  return goal;
}

inline std::vector<Sent> Snapshots(const rehearsal::InventedSample& sample,
                                   const std::vector<std::uint64_t>& looks, const v1::Goal& goal,
                                   std::uint64_t seed = 1) {
  rehearsal::InventedRun run(sample, seed);
  std::vector<Sent> sent;
  for (const std::uint64_t scans : looks) {
    formats::Recording recording = run.AdvanceTo(scans);
    *recording.snapshot.mutable_goal() = goal;
    sent.push_back({recording.snapshot, FrameOf(recording.samples)});
  }
  return sent;
}

// 1, 2, ... `count` times `scans`.
inline std::vector<std::uint64_t> Every(std::uint64_t scans, std::uint64_t count) {
  std::vector<std::uint64_t> looks;
  for (std::uint64_t look = 1; look <= count; ++look) looks.push_back(look * scans);
  return looks;
}

inline v1::Advice Admit(Run& run, const Sent& sent) { return run.Admit(sent.snapshot, sent.frame); }

// All advice of a run with these settings.
inline std::vector<v1::Advice> Played(const std::vector<Sent>& sent,
                                      const v1::EngineSettings& settings = DefaultSettings()) {
  Run run(settings);
  std::vector<v1::Advice> advice;
  for (const Sent& each : sent) advice.push_back(Admit(run, each));
  return advice;
}

}  // namespace lastscan::engine
