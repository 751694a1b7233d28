#include "engine/sensitivity/posterior.h"

#include <algorithm>
#include <array>
#include <boost/math/special_functions/bessel.hpp>
#include <cmath>
#include <numbers>

namespace lastscan::engine {
namespace {

// ln I0(x) - x. From a table below kTableEnd (linear interpolation, error below
// 1e-4), from the asymptotic series above.
double ScaledLogBesselI0(double x) {
  constexpr double kTableEnd = 32;
  constexpr double kTableStep = 1.0 / 32;
  static const auto table = [] {
    std::array<double, static_cast<std::size_t>(kTableEnd / kTableStep) + 2> values{};
    for (std::size_t i = 0; i < values.size(); ++i) {
      const double at = static_cast<double>(i) * kTableStep;
      values[i] = std::log(boost::math::cyl_bessel_i(0, at)) - at;
    }
    return values;
  }();
  if (x >= kTableEnd) {
    return -0.5 * std::log(2 * std::numbers::pi * x) + std::log1p(0.125 / x);
  }
  const double position = x / kTableStep;
  const auto index = static_cast<std::size_t>(position);
  const double fraction = position - static_cast<double>(index);
  return table[index] * (1 - fraction) + table[index + 1] * fraction;
}

}  // namespace

AmplitudePosterior AmplitudePosterior::OfLine(double z, double chosen, double deviation) {
  constexpr int kSteps = 400;
  constexpr double kReach = 7;  // standard deviations
  AmplitudePosterior posterior;
  posterior.first_ = std::max(1e-3, z - kReach * deviation);
  const double last = std::max(z, 0.0) + kReach * deviation;
  posterior.step_ = (last - posterior.first_) / kSteps;
  for (int i = 0; i <= kSteps; ++i) {
    const double a = posterior.first_ + i * posterior.step_;
    const double distance = (a - z) / deviation;
    posterior.density_.push_back(std::exp(-0.5 * distance * distance) * std::pow(a, -0.5 * chosen));
  }
  posterior.Normalise();
  return posterior;
}

AmplitudePosterior AmplitudePosterior::OfUnseen(std::span<const float> readings, int quadratures) {
  // Bins are counted by their reading first: the sum over some ten thousand
  // bins becomes one over some hundred cells.
  constexpr double kCell = 0.04;
  constexpr double kStep = 0.1;
  AmplitudePosterior posterior;
  posterior.step_ = kStep;
  const double highest =
      readings.empty() ? 0.0 : std::max(0.0F, *std::max_element(readings.begin(), readings.end()));
  const double lowest =
      readings.empty() ? 0.0 : std::min(0.0F, *std::min_element(readings.begin(), readings.end()));
  std::vector<double> counts(static_cast<std::size_t>((highest - lowest) / kCell) + 1, 0.0);
  for (float reading : readings) {
    counts[static_cast<std::size_t>((reading - lowest) / kCell)] += 1;
  }
  const auto steps = static_cast<int>((highest + 6) / kStep);
  std::vector<double> logs;
  for (int i = 0; i <= steps; ++i) {
    const double a = i * kStep;
    double sum = 0;
    const double reference = a * highest;
    for (std::size_t cell = 0; cell < counts.size(); ++cell) {
      if (counts[cell] == 0) continue;
      const double x = lowest + (static_cast<double>(cell) + 0.5) * kCell;
      const double log_term =
          quadratures == 2 ? a * std::abs(x) + ScaledLogBesselI0(a * std::abs(x)) : a * x;
      sum += counts[cell] * std::exp(log_term - reference);
    }
    logs.push_back(reference - 0.5 * a * a + std::log(std::max(sum, 1e-300)));
  }
  // The mean of X_j weighted with exp(a X_j) is the slope of the logarithm of
  // the sum (with I0, the mean of what lies in phase).
  for (std::size_t i = 0; i < logs.size(); ++i) {
    const std::size_t above = std::min(i + 1, logs.size() - 1);
    const std::size_t below = i == 0 ? 0 : i - 1;
    const double slope = (logs[above] - logs[below]) / (static_cast<double>(above - below) * kStep);
    posterior.readings_.push_back(0.5 * static_cast<double>(above + below) * kStep + slope);
  }
  const double most = *std::max_element(logs.begin(), logs.end());
  for (double value : logs) posterior.density_.push_back(std::exp(value - most));
  posterior.Normalise();
  return posterior;
}

void AmplitudePosterior::Normalise() {
  double total = 0;
  for (double value : density_) total += value;
  double sum = 0;
  for (double& value : density_) {
    value /= total;
    cumulative_.push_back(sum + 0.5 * value);
    sum += value;
  }
}

double AmplitudePosterior::Quantile(double probability) const {
  const auto above = std::lower_bound(cumulative_.begin(), cumulative_.end(), probability);
  if (above == cumulative_.begin()) return first_;
  if (above == cumulative_.end()) return first_ + step_ * static_cast<double>(density_.size() - 1);
  const auto index = static_cast<double>(above - cumulative_.begin());
  const double below = *(above - 1);
  return first_ + step_ * (index - 1 + (probability - below) / (*above - below));
}

double AmplitudePosterior::Expect(const std::function<double(double)>& value) const {
  double sum = 0;
  for (std::size_t i = 0; i < density_.size(); ++i) {
    if (density_[i] > 1e-12) sum += density_[i] * value(first_ + static_cast<double>(i) * step_);
  }
  return sum;
}

double AmplitudePosterior::Expect(const std::function<double(double, double)>& value) const {
  double sum = 0;
  for (std::size_t i = 0; i < density_.size(); ++i) {
    if (density_[i] < 1e-12) continue;
    sum += density_[i] * value(first_ + static_cast<double>(i) * step_, readings_[i]);
  }
  return sum;
}

}  // namespace lastscan::engine
