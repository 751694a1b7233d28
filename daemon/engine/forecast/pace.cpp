#include "engine/forecast/pace.h"

#include <algorithm>
#include <cmath>

namespace lastscan::engine {

void Pace::Add(double seconds, double scans) {
  // A clock that was set back, or files stamped alike, say nothing of the pace.
  if (last_scans_ > 0 && seconds > last_seconds_ && scans > last_scans_) {
    if (intervals_.size() == kKept) intervals_.erase(intervals_.begin());
    intervals_.push_back((seconds - last_seconds_) / (scans - last_scans_));
  }
  last_seconds_ = seconds;
  last_scans_ = scans;
}

double Pace::SecondsPerScan() const {
  if (intervals_.empty()) return 0;
  std::vector<double> sorted = intervals_;
  const auto middle = sorted.begin() + static_cast<std::ptrdiff_t>(sorted.size() / 2);
  std::nth_element(sorted.begin(), middle, sorted.end());
  return *middle;
}

void Pace::Restore(std::vector<double> intervals, double last_seconds, double last_scans) {
  intervals_ = std::move(intervals);
  last_seconds_ = last_seconds;
  last_scans_ = last_scans;
}

std::uint64_t WholeCycles(double scans, std::uint32_t cycle) {
  const double length = std::max<std::uint32_t>(cycle, 1);
  // A hair under a whole cycle is that cycle, not the next one.
  return static_cast<std::uint64_t>(std::ceil(scans / length - 1e-9) * length);
}

}  // namespace lastscan::engine
