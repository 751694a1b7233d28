// What was noticed about a run: each finding with its severity, the numbers
// behind it, the scan it began at and what to look at on the instrument.
// Add a kind: advice.proto (FindingKind), a rule here, a night in tests/nights.
#pragma once

#include <optional>
#include <vector>

#include "engine/advice/amplitude_history.h"
#include "engine/sensitivity/noise.h"
#include "lastscan/v1/advice.pb.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

// What the rules look at, gathered while a snapshot was judged.
struct Observations {
  double scans_before = 0;  // 0 at the first snapshot
  double scans = 0;
  NoiseEstimate noise_before;
  NoiseEstimate noise;
  double noise_of_increment = 0;             // per scan; 0: not known
  double deviation_of_increment = 0;         // relative, of that number
  std::optional<double> relative_amplitude;  // of the increment
  double amplitude_deviation = 0;
  std::optional<AmplitudeChange> amplitude_change;
  v1::Interval noise_growth;
  bool strong_lines = false;    // their feet may fill quiet regions
  double window_excess = 1;     // rms in the noise window over the scatter's
  double window_deviation = 0;  // relative, of that ratio
  double seconds_per_scan = 0;
};

class Findings {
 public:
  // All findings that hold after this snapshot.
  std::vector<v1::Finding> Look(const v1::Snapshot& snapshot, const Observations& seen);

  void SaveTo(state::Run& state) const;
  void RestoreFrom(const state::Run& state);

 private:
  bool Stands(v1::FindingKind kind) const;
  void Stand(v1::Finding finding);

  std::vector<v1::Finding> standing_;  // once found, they hold to the end of the run
  double highest_lock_level_ = 0;
  double lock_lost_since_ = 0;  // scan; 0: it is well
  std::optional<double> receiver_gain_db_;
};

}  // namespace lastscan::engine
