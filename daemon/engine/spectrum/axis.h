// Where a bin of the spectrum lies: bins run with rising chemical shift, evenly.
#pragma once

#include <algorithm>
#include <cmath>
#include <cstddef>
#include <vector>

#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

// Bins first..last, both included. Empty when first > last.
struct BinRange {
  std::ptrdiff_t first = 0;
  std::ptrdiff_t last = -1;
  bool empty() const { return first > last; }
  std::ptrdiff_t size() const { return empty() ? 0 : last - first + 1; }
  bool contains(double bin) const {
    return bin >= static_cast<double>(first) && bin <= static_cast<double>(last);
  }
};

// Bins of all ranges together, and whether any holds `bin`.
inline std::ptrdiff_t CountOf(const std::vector<BinRange>& ranges) {
  std::ptrdiff_t count = 0;
  for (const BinRange& range : ranges) count += range.size();
  return count;
}
inline bool Contains(const std::vector<BinRange>& ranges, double bin) {
  return std::any_of(ranges.begin(), ranges.end(),
                     [&](const BinRange& range) { return range.contains(bin); });
}

struct Axis {
  std::ptrdiff_t bins = 0;
  double hz_per_bin = 0;
  double observe_frequency_mhz = 0;
  double first_ppm = 0;  // shift of bin 0

  double ppm_per_bin() const { return hz_per_bin / observe_frequency_mhz; }
  double PpmAt(double bin) const { return first_ppm + bin * ppm_per_bin(); }
  double BinAt(double ppm) const { return (ppm - first_ppm) / ppm_per_bin(); }

  // The bins of a shift range, cut off at the ends of the spectrum.
  BinRange BinsOf(const v1::ShiftRange& range) const {
    const auto first = static_cast<std::ptrdiff_t>(std::ceil(BinAt(range.low_ppm())));
    const auto last = static_cast<std::ptrdiff_t>(std::floor(BinAt(range.high_ppm())));
    return {first < 0 ? 0 : first, last >= bins ? bins - 1 : last};
  }
};

}  // namespace lastscan::engine
