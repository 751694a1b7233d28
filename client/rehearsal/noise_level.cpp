#include "rehearsal/noise_level.h"

#include <algorithm>
#include <numeric>

#include "rehearsal/measured_noise.h"

namespace lastscan::rehearsal {

constexpr std::size_t kBands = MeasuredNoise::kBands;

double Quantile(std::vector<double> values, double share) {
  const auto at =
      values.begin() + static_cast<std::ptrdiff_t>(share * static_cast<double>(values.size() - 1));
  std::nth_element(values.begin(), at, values.end());
  return *at;
}

Level InsidePassband(const std::vector<Level>& bands) {
  std::vector<double> powers;
  for (const Level& band : bands) {
    if (band.known()) powers.push_back(band.power);
  }
  if (powers.empty()) return {};
  const double middle = Quantile(powers, 0.5);
  double sum = 0;
  double weights = 0;
  for (const Level& band : bands) {
    if (!band.known() || std::abs(band.power / middle - 1) > 3 * band.deviation) continue;
    const double weight = 1 / (band.deviation * band.deviation);
    sum += weight * band.power;
    weights += weight;
  }
  if (weights == 0) return {middle, 1};
  return {sum / weights, 1 / std::sqrt(weights)};
}

std::vector<double> PassbandOf(const std::vector<Level>& bands, const Level& inside) {
  std::vector<double> passband;
  for (std::size_t i = 0; i < kBands; ++i) {
    const Level& band = bands[i * bands.size() / kBands];
    const double ratio = inside.power > 0 && band.known() ? band.power / inside.power : 1;
    passband.push_back(ratio < 1 - 3 * band.deviation ? ratio : 1);
  }
  return passband;
}

double Mean(const std::vector<double>& values) {
  return std::accumulate(values.begin(), values.end(), 0.0) / static_cast<double>(values.size());
}

}  // namespace lastscan::rehearsal
