#include "engine/advice/noise_growth.h"

#include <algorithm>
#include <cmath>

namespace lastscan::engine {

bool NoiseGrowth::Wants(double scans) const {
  return marks_.empty() || scans >= 1.5 * marks_.back().scans;
}

void NoiseGrowth::Add(double scans, double rms, double relative_deviation) {
  if (!(rms > 0)) return;
  marks_.push_back({scans, rms, relative_deviation});
}

v1::Interval NoiseGrowth::Exponent() const {
  v1::Interval exponent;
  exponent.set_estimate(0.5);
  exponent.set_upper(1);
  if (marks_.size() < 3) return exponent;
  const double count = static_cast<double>(marks_.size());
  double x_mean = 0;
  double y_mean = 0;
  for (const Mark& mark : marks_) {
    x_mean += std::log(mark.scans) / count;
    y_mean += std::log(mark.rms) / count;
  }
  double xx = 0;
  double xy = 0;
  double variance = 0;  // of xy
  for (const Mark& mark : marks_) {
    const double x = std::log(mark.scans) - x_mean;
    xx += x * x;
    xy += x * (std::log(mark.rms) - y_mean);
    // Later marks hold the scans of earlier ones: the powers of n and m scans are
    // correlated by n/m, which makes the slope err more than independent marks
    // would, by 1.7 times its deviation after 16 of them.
    for (const Mark& other : marks_) {
      const double shared = std::min(mark.scans, other.scans) / std::max(mark.scans, other.scans);
      variance += shared * x * mark.relative_deviation * (std::log(other.scans) - x_mean) *
                  other.relative_deviation;
    }
  }
  const double half = 1.96 * std::sqrt(std::max(variance, 0.0)) / xx;
  exponent.set_estimate(xy / xx);
  exponent.set_lower(xy / xx - half);
  exponent.set_upper(xy / xx + half);
  return exponent;
}

void NoiseGrowth::SaveTo(state::Run& state) const {
  for (const Mark& mark : marks_) {
    state::NoiseMark& saved = *state.add_noise_marks();
    saved.set_scans(mark.scans);
    saved.set_rms(mark.rms);
    saved.set_relative_deviation(mark.relative_deviation);
  }
}

void NoiseGrowth::RestoreFrom(const state::Run& state) {
  marks_.clear();
  for (const auto& saved : state.noise_marks()) {
    marks_.push_back({saved.scans(), saved.rms(), saved.relative_deviation()});
  }
}

}  // namespace lastscan::engine
