#include "engine/forecast/stop_boundary.h"

#include <algorithm>
#include <boost/math/distributions/normal.hpp>
#include <boost/math/tools/toms748_solve.hpp>
#include <cmath>
#include <numbers>
#include <vector>

namespace lastscan::engine {
namespace {

constexpr double kReach = 7.5;        // standard deviations kept of a density
constexpr double kNegligible = 1e-9;  // crossings rarer than this are none
constexpr double kCellsPerStep = 3;   // grid cells per deviation of one step
constexpr double kLimitStep = 1.02;
constexpr int kMostLooksPower = 11;

double UpperTail(double z) {
  return boost::math::cdf(boost::math::complement(boost::math::normal(), z));
}

// A density on an even grid up to an absorbing end that falls inside a cell.
struct Density {
  double first = 0;
  double cell = 0;
  std::vector<double> values;  // times its quadrature weight, once weighted
};

// Weighs the five grid points nearest to an end of the integral that lies `over`
// cells beyond the last of them, `end`: the trapezoid with Gregory's end
// correction, and the polynomial through the five points over the part beyond,
// both in differences that reach `inward`. The density is cut off there, not
// zero, so the plain trapezoid would lose a little of what crosses next, at
// each of hundreds of looks.
void WeighEnd(double over, double* end, std::ptrdiff_t inward) {
  const double x = over;
  const double first = x * x / 2 - 1.0 / 12;
  const double second = x * x * (x / 6 + 1.0 / 4) - 1.0 / 24;
  const double third = x * x * (x * x / 4 + x + 1) / 6 - 19.0 / 720;
  const double fourth = x * x * (x * x * x / 5 + 1.5 * x * x + 11 * x / 3 + 3) / 24 - 3.0 / 160;
  end[0] *= 0.5 + x + first + second + third + fourth;
  end[inward] *= 1 - first - 2 * second - 3 * third - 4 * fourth;
  end[2 * inward] *= 1 + second + 3 * third + 6 * fourth;
  end[3 * inward] *= 1 - third - 4 * fourth;
  end[4 * inward] *= 1 + fourth;
}

// Multiplies each value by its quadrature weight for the integral start..end.
void Weigh(Density& density, double start, double end) {
  auto& v = density.values;
  const std::size_t last = v.size() - 1;
  if (v.size() >= 10) {
    const double last_place = density.first + static_cast<double>(last) * density.cell;
    WeighEnd((end - last_place) / density.cell, &v[last], -1);
    WeighEnd((density.first - start) / density.cell, &v[0], 1);
  }
  for (double& value : v) value *= density.cell;
}

}  // namespace

double CrossingProbability(std::span<const double> times, std::span<const double> upper,
                           double drift, bool two_sided) {
  double crossed = 0;
  Density density;  // empty: all mass still follows the free motion
  double previous = 0;
  for (std::size_t k = 0; k < times.size(); ++k) {
    const double t = times[k];
    const double root = std::sqrt(t);
    const double bound = upper[k] * root;
    const double mean = drift * t;
    if (density.values.empty()) {
      // Until a crossing is thinkable the motion is plainly normal.
      const double above = UpperTail((bound - mean) / root);
      const double below = two_sided ? UpperTail((bound + mean) / root) : 0;
      if (above + below < kNegligible && k + 1 < times.size()) continue;
      crossed += above + below;
    }
    const double low = two_sided ? std::max(-bound, mean - kReach * root) : mean - kReach * root;
    const double high = std::min(bound, mean + kReach * root);
    if (low >= high) return crossed;
    const double step = k + 1 < times.size() ? std::sqrt(times[k + 1] - t) : root;
    // The last step has left its mark at the boundary: what crossed is missing
    // there, over about one deviation of that step.
    const double last_step = density.values.empty() ? root : std::sqrt(t - previous);
    // Evenly spaced looks share one grid, rounding apart: see same_grid below.
    double cell = std::min(step, last_step) / kCellsPerStep;
    if (std::abs(cell - density.cell) < 1e-6 * cell) cell = density.cell;
    Density next;
    next.cell = cell;
    next.first = std::ceil(low / cell) * cell;
    const auto count = static_cast<std::size_t>(std::floor((high - next.first) / cell)) + 1;
    next.values.resize(count);
    if (density.values.empty()) {
      for (std::size_t i = 0; i < count; ++i) {
        const double x = next.first + static_cast<double>(i) * cell;
        const double z = (x - mean) / root;
        next.values[i] = std::exp(-0.5 * z * z) / (root * std::sqrt(2 * std::numbers::pi));
      }
    } else {
      const double dt = t - previous;
      const double deviation = std::sqrt(dt);
      const double scale = 1 / (deviation * std::sqrt(2 * std::numbers::pi));
      const double shift = drift * dt;
      // What crosses at this look, from each place the motion could be at.
      for (std::size_t i = 0; i < density.values.size(); ++i) {
        const double x = density.first + static_cast<double>(i) * density.cell;
        if (density.values[i] < 1e-14) continue;
        const double above = (bound - x - shift) / deviation;
        if (above < 8) crossed += density.values[i] * UpperTail(above);
        if (two_sided) {
          const double below = (x + shift + bound) / deviation;
          if (below < 8) crossed += density.values[i] * UpperTail(below);
        }
      }
      // On one grid the transition depends on the distance alone.
      const bool same_grid = cell == density.cell;
      std::vector<double> kernel;
      const auto offset =
          static_cast<std::ptrdiff_t>(std::llround((next.first - density.first) / density.cell));
      const auto reach = static_cast<std::ptrdiff_t>(8 * deviation / density.cell) + 1;
      const auto centre = static_cast<std::ptrdiff_t>(std::llround(shift / density.cell));
      if (same_grid) {
        for (std::ptrdiff_t d = centre - reach; d <= centre + reach; ++d) {
          const double z = (static_cast<double>(d) * cell - shift) / deviation;
          kernel.push_back(scale * std::exp(-0.5 * z * z));
        }
      }
      const auto before = static_cast<std::ptrdiff_t>(density.values.size());
      for (std::size_t i = 0; i < count; ++i) {
        const double x = next.first + static_cast<double>(i) * cell;
        double value = 0;
        if (same_grid) {
          const std::ptrdiff_t middle = static_cast<std::ptrdiff_t>(i) + offset - centre;
          const std::ptrdiff_t from = std::max<std::ptrdiff_t>(0, middle - reach);
          const std::ptrdiff_t to = std::min(before - 1, middle + reach);
          for (std::ptrdiff_t j = from; j <= to; ++j) {
            value += density.values[static_cast<std::size_t>(j)] *
                     kernel[static_cast<std::size_t>(middle + reach - j)];
          }
        } else {
          for (std::size_t j = 0; j < density.values.size(); ++j) {
            const double z =
                (x - density.first - static_cast<double>(j) * density.cell - shift) / deviation;
            if (std::abs(z) < 8) value += density.values[j] * scale * std::exp(-0.5 * z * z);
          }
        }
        next.values[i] = value;
      }
    }
    Weigh(next, low, high);
    density = std::move(next);
    previous = t;
  }
  return crossed;
}

double StopMargin(double limit, int looks, double chance) {
  std::vector<double> times;
  for (int k = 1; k <= looks; ++k) times.push_back(static_cast<double>(k) / looks);
  std::vector<double> upper(times.size());
  const auto excess = [&](double margin) {
    std::fill(upper.begin(), upper.end(), limit + margin);
    return CrossingProbability(times, upper, limit, false) - chance;
  };
  boost::uintmax_t rounds = 60;
  const auto bracket = boost::math::tools::toms748_solve(
      excess, 0.0, 6.0, [](double a, double b) { return std::abs(a - b) < 1e-4; }, rounds);
  return bracket.second;
}

double StopMargins::Remembered(int limit_step, int looks_power, double chance) {
  const auto key = std::pair(std::pair(limit_step, looks_power), chance);
  {
    const std::lock_guard lock(mutex_);
    const auto found = margins_.find(key);
    if (found != margins_.end()) return found->second;
  }
  const double margin = StopMargin(std::pow(kLimitStep, limit_step), 1 << looks_power, chance);
  const std::lock_guard lock(mutex_);
  return margins_.emplace(key, margin).first->second;
}

double StopMargins::At(double limit, double looks, double chance) {
  const double clamped = std::clamp(limit, 0.5, 200.0);
  const auto limit_step = static_cast<int>(std::floor(std::log(clamped) / std::log(kLimitStep)));
  const int power = static_cast<int>(std::ceil(std::log2(std::max(looks, 1.0)) - 1e-9));
  const double margin = Remembered(limit_step, std::min(power, kMostLooksPower), chance);
  if (power <= kMostLooksPower) return margin;
  // Each doubling of the looks adds less than the one before it.
  const double growth = margin - Remembered(limit_step, kMostLooksPower - 1, chance);
  return margin + growth * (power - kMostLooksPower);
}

StopMargins& StopMargins::Shared() {
  static StopMargins margins;
  return margins;
}

}  // namespace lastscan::engine
