// How long a scan takes, from the times at which snapshots were recorded.
#pragma once

#include <cstdint>
#include <vector>

namespace lastscan::engine {

// Keeps the last kKept intervals; their median leaves pauses out.
class Pace {
 public:
  static constexpr std::size_t kKept = 65;

  // Takes the snapshot recorded at `seconds` (Unix time) after `scans` scans.
  void Add(double seconds, double scans);

  // Median seconds per scan; 0 while there is no interval.
  double SecondsPerScan() const;

  const std::vector<double>& intervals() const { return intervals_; }
  double last_seconds() const { return last_seconds_; }
  double last_scans() const { return last_scans_; }
  void Restore(std::vector<double> intervals, double last_seconds, double last_scans);

 private:
  std::vector<double> intervals_;  // seconds per scan, oldest first
  double last_seconds_ = 0;
  double last_scans_ = 0;
};

// `scans` rounded up to a whole number of phase cycles (cycle 0 counts as 1).
std::uint64_t WholeCycles(double scans, std::uint32_t cycle);

}  // namespace lastscan::engine
