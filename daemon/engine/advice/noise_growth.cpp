#include "engine/advice/noise_growth.h"

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
  double variance = 0;
  for (const Mark& mark : marks_) {
    x_mean += std::log(mark.scans) / count;
    y_mean += std::log(mark.rms) / count;
    variance += mark.relative_deviation * mark.relative_deviation / count;
  }
  double xx = 0;
  double xy = 0;
  for (const Mark& mark : marks_) {
    const double x = std::log(mark.scans) - x_mean;
    xx += x * x;
    xy += x * (std::log(mark.rms) - y_mean);
  }
  // Neighbouring marks share scans, which only makes their scatter smaller;
  // taking them as independent keeps the interval on the wide side.
  const double half = 1.96 * std::sqrt(variance / xx);
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
