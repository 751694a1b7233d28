// The named nights of an invented lab: runs whose truth is known, each with
// what a good operator would want to hear about it. They serve `lastscan
// rehearse`, the demo and tests/nights. The lab, its instruments and its
// samples do not exist.
#pragma once

#include <cstdint>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "lastscan/v1/snapshot.pb.h"
#include "rehearsal/invented_run.h"

namespace lastscan::rehearsal {

struct Scenario {
  std::string name;   // lower case, words joined by hyphens
  std::string story;  // what the operator did, and wants
  InventedSample sample;
  std::vector<std::uint64_t> looks;  // scans at which a snapshot is exported, rising
  v1::Goal goal;
  std::optional<double> booking_hours;  // from the first scan; unset: no booking
  std::string truth;                    // what is really there, one sentence
};

// All of them, in the order in which a newcomer should see them.
const std::vector<Scenario>& Scenarios();

// The one called `name`, or null.
const Scenario* FindScenario(std::string_view name);

// A small sample for studies of thousands of runs: 1,024 points, 2,000 Hz, no
// receiver delay, one line of 2 Hz at 101.3 ppm in the range 90.1 to 109.9 ppm,
// broadened by 2 Hz. A run of 64 snapshots takes a few milliseconds.
InventedSample StudySample(double signal_to_noise_per_scan);

}  // namespace lastscan::rehearsal
