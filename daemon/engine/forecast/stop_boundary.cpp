#include "engine/forecast/stop_boundary.h"

#include <algorithm>
#include <array>
#include <boost/math/distributions/normal.hpp>
#include <boost/math/tools/toms748_solve.hpp>
#include <cmath>
#include <numbers>
#include <vector>

namespace lastscan::engine {
namespace {

constexpr double kReach = 7.5;        // standard deviations kept of a density
constexpr double kNegligible = 1e-9;  // crossings rarer than this are none
constexpr double kStepReach = 7;      // and of the density of one step
constexpr double kCellsPerStep = 3;   // grid cells per deviation of one step
constexpr double kLimitStep = 1.02;
constexpr int kMostLooksPower = 11;

double UpperTail(double z) {
  return boost::math::cdf(boost::math::complement(boost::math::normal(), z));
}

// A density on an even grid that ends where the motion is absorbed.
struct Density {
  double first = 0;
  double cell = 0;
  std::vector<double> values;  // times its quadrature weight, once weighted

  double At(std::size_t i) const { return first + static_cast<double>(i) * cell; }
};

// An even grid over low..high, of cells of about `cell`. Its last point lies on
// `high` and, where `both`, its first on `low`: there the density is cut off.
Density GridOver(double low, double high, double cell, bool both) {
  const double cells = (high - low) / cell;
  Density grid;
  grid.cell = both ? cell * cells / std::ceil(cells) : cell;
  const auto count = static_cast<std::size_t>(both ? std::ceil(cells) : std::floor(cells)) + 1;
  grid.first = high - static_cast<double>(count - 1) * grid.cell;
  grid.values.resize(count);
  return grid;
}

// Multiplies each value by its quadrature weight: the trapezoid with Gregory's
// end correction to the fourth difference. The density is cut off at its end,
// not zero, so the plain trapezoid would lose a little of what crosses next, at
// each of hundreds of looks.
void Weigh(Density& density) {
  constexpr std::array kEnd = {95.0 / 288, 317.0 / 240, 23.0 / 30, 793.0 / 720, 157.0 / 160};
  auto& v = density.values;
  const std::size_t last = v.size() - 1;
  if (v.size() >= 2 * kEnd.size()) {
    for (std::size_t i = 0; i < kEnd.size(); ++i) {
      v[i] *= kEnd[i];
      v[last - i] *= kEnd[i];
    }
  } else {
    v[0] *= 0.5;
    v[last] *= 0.5;
  }
  for (double& value : v) value *= density.cell;
}

// Where a motion that is at `before` moves to in a step of mean `shift`.
void Move(const Density& before, double shift, double deviation, Density& after) {
  const double scale = 1 / (deviation * std::sqrt(2 * std::numbers::pi));
  const auto count = static_cast<std::ptrdiff_t>(after.values.size());
  const auto count_before = static_cast<std::ptrdiff_t>(before.values.size());
  if (before.cell != after.cell) {
    for (std::size_t i = 0; i < after.values.size(); ++i) {
      double value = 0;
      for (std::size_t j = 0; j < before.values.size(); ++j) {
        const double z = (after.At(i) - before.At(j) - shift) / deviation;
        if (std::abs(z) < kStepReach) value += before.values[j] * std::exp(-0.5 * z * z);
      }
      after.values[i] = value * scale;
    }
    return;
  }
  // Cells of one size: the density of a step depends on i - j alone.
  const double origin = (after.first - before.first - shift) / before.cell;
  const double reach = kStepReach * deviation / before.cell;
  const auto first = static_cast<std::ptrdiff_t>(std::ceil(-reach - origin));
  const auto last = static_cast<std::ptrdiff_t>(std::floor(reach - origin));
  std::vector<double> kernel;
  for (std::ptrdiff_t d = first; d <= last; ++d) {
    const double z = (origin + static_cast<double>(d)) * before.cell / deviation;
    kernel.push_back(scale * std::exp(-0.5 * z * z));
  }
  for (std::ptrdiff_t i = 0; i < count; ++i) {
    const std::ptrdiff_t from = std::max<std::ptrdiff_t>(0, i - last);
    const std::ptrdiff_t to = std::min(count_before - 1, i - first);
    double value = 0;
    for (std::ptrdiff_t j = from; j <= to; ++j) {
      value += before.values[static_cast<std::size_t>(j)] *
               kernel[static_cast<std::size_t>(i - j - first)];
    }
    after.values[static_cast<std::size_t>(i)] = value;
  }
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
    const bool free = density.values.empty();
    if (free) {
      // Until a crossing is thinkable the motion is plainly normal.
      const double above = UpperTail((bound - mean) / root);
      const double below = two_sided ? UpperTail((bound + mean) / root) : 0;
      if (above + below < kNegligible && k + 1 < times.size()) continue;
      crossed += above + below;
    }
    const double low = two_sided ? std::max(-bound, mean - kReach * root) : mean - kReach * root;
    const double high = std::min(bound, mean + kReach * root);
    if (low >= high) return crossed;
    // The last step has left its mark at the boundary: what crossed is missing
    // there, over about one deviation of that step.
    const double last_step = free ? root : std::sqrt(t - previous);
    const double step = k + 1 < times.size() ? std::sqrt(times[k + 1] - t) : root;
    double cell = std::min(step, last_step) / kCellsPerStep;
    // Evenly spaced looks share one size of cell, rounding apart.
    if (std::abs(cell - density.cell) < 1e-6 * cell) cell = density.cell;
    Density next = GridOver(low, high, cell, two_sided);
    if (free) {
      for (std::size_t i = 0; i < next.values.size(); ++i) {
        const double z = (next.At(i) - mean) / root;
        next.values[i] = std::exp(-0.5 * z * z) / (root * std::sqrt(2 * std::numbers::pi));
      }
    } else {
      const double shift = drift * (t - previous);
      // What crosses at this look, from each place the motion could be at.
      for (std::size_t i = 0; i < density.values.size(); ++i) {
        const double above = (bound - density.At(i) - shift) / last_step;
        if (above < kStepReach) crossed += density.values[i] * UpperTail(above);
        if (!two_sided) continue;
        const double below = (density.At(i) + shift + bound) / last_step;
        if (below < kStepReach) crossed += density.values[i] * UpperTail(below);
      }
      Move(density, shift, last_step, next);
    }
    Weigh(next);
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
