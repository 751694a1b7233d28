// The stop boundary: how far above a lower limit a repeated reading must stand
// so that stopping below that limit stays rare, over all looks together.
#pragma once

#include <map>
#include <mutex>
#include <span>
#include <utility>

namespace lastscan::engine {

// Probability that a Brownian motion with `drift`, seen at rising `times`, ever
// has B(t)/sqrt(t) >= upper[k] (or <= -upper[k] too, when `two_sided`) at a
// look. Recursive numerical integration of the density that has not crossed
// yet (Armitage, McPherson and Rowe, J. R. Stat. Soc. A 1969, 132, 235), by the
// trapezoidal rule with end corrections; absolute error below 1e-4.
// REQUIRES: times and upper of one length, times positive and rising.
double CrossingProbability(std::span<const double> times, std::span<const double> upper,
                           double drift, bool two_sided);

// The smallest c such that a run whose true signal-to-noise reaches `limit` just
// after the last of `looks` evenly spaced looks is ever read at limit + c or
// more with probability at most `chance`. A run that reaches the limit later
// crosses more rarely. REQUIRES: limit > 0, looks >= 1, 0 < chance < 0.5.
double StopMargin(double limit, int looks, double chance);

// StopMargin, remembered. Looks are rounded up to a power of two and the limit
// down to a grid of 2 %: both make the margin larger, never smaller, and keep
// the table short. Beyond 2,048 looks, and outside 0.5 to 200, the end of the
// table serves, corrected by the growth of the last doubling. Thread-safe.
class StopMargins {
 public:
  double At(double limit, double looks, double chance);

  // One table for the whole process: margins are facts of arithmetic.
  static StopMargins& Shared();

 private:
  double Remembered(int limit_step, int looks_power, double chance);

  std::mutex mutex_;
  std::map<std::pair<std::pair<int, int>, double>, double> margins_;
};

}  // namespace lastscan::engine
