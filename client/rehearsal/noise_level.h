// Levels of noise in the bands of a spectrum, and the passband they make.
#pragma once

#include <cmath>
#include <vector>

namespace lastscan::rehearsal {

// A power with its relative standard deviation; of a band that holds no quiet
// bin the deviation is infinite.
struct Level {
  double power = 0;
  double deviation = INFINITY;
  bool known() const { return std::isfinite(deviation); }
};

// The level inside the passband, from bands of which most lie inside it and are
// not crowded with lines; unknown when all of them are.
Level InsidePassband(const std::vector<Level>& bands);

// Each band over the passband where it is clearly lower, by three deviations,
// else 1. MeasuredNoise::kBands values; of fewer bands each serves several.
std::vector<double> PassbandOf(const std::vector<Level>& bands, const Level& inside);

// The value below which `share` (0..1) of `values` lie. REQUIRES: not empty.
double Quantile(std::vector<double> values, double share);

// REQUIRES: not empty.
double Mean(const std::vector<double>& values);

}  // namespace lastscan::rehearsal
