// How the noise of the accumulation grows with scans: as n^0.5 when scans
// average it away, towards n^1 when something coherent adds up.
#pragma once

#include <vector>

#include "engine/state.pb.h"
#include "lastscan/v1/advice.pb.h"

namespace lastscan::engine {

class NoiseGrowth {
 public:
  // Whether a mark at `scans` is wanted: they have grown by half since the last
  // one kept. Marks in between would say little more.
  bool Wants(double scans) const;

  // Takes the rms of the accumulation in its quiet part after `scans` scans,
  // with its relative standard deviation. REQUIRES: Wants(scans).
  void Add(double scans, double rms, double relative_deviation);

  // Exponent of a straight line through log rms against log scans, with 95 %
  // limits; 0.5 within 0 to 1 while fewer than three points are kept.
  v1::Interval Exponent() const;

  void SaveTo(state::Run& state) const;
  void RestoreFrom(const state::Run& state);

 private:
  struct Mark {
    double scans;
    double rms;
    double relative_deviation;
  };
  std::vector<Mark> marks_;
};

}  // namespace lastscan::engine
