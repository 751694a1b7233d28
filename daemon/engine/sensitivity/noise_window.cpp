#include "engine/sensitivity/noise_window.h"

#include <cmath>
#include <cstdio>
#include <string>
#include <vector>

#include "engine/refusal.h"
#include "engine/sensitivity/noise.h"

namespace lastscan::engine {
namespace {

double IndependentPoints(BinRange window, const Transform& transform) {
  return static_cast<double>(window.size()) * transform.independent_bins() /
         static_cast<double>(transform.axis().bins);
}

}  // namespace

BinRange NoiseWindowBins(const v1::ShiftRange& window, const Transform& transform) {
  const Axis& axis = transform.axis();
  char text[96];
  std::snprintf(text, sizeof text, "noise window %.6g to %.6g ppm", window.low_ppm(),
                window.high_ppm());
  const double first = axis.PpmAt(0);
  const double last = axis.PpmAt(static_cast<double>(axis.bins - 1));
  if (window.low_ppm() < first || window.high_ppm() > last) {
    char span[64];
    std::snprintf(span, sizeof span, "%.6g to %.6g ppm", first, last);
    throw Refusal(std::string(text) + " reaches outside the spectrum, which covers " + span +
                  ": mend the window or the shift at the centre");
  }
  const BinRange bins = axis.BinsOf(window);
  if (bins.size() < 5 || IndependentPoints(bins, transform) < 5) {
    throw Refusal(std::string(text) + " holds fewer than five independent points: widen it");
  }
  return bins;
}

NoiseWindowReading ReadNoiseWindow(std::span<const std::complex<double>> spectrum, BinRange window,
                                   const Transform& transform, double unit) {
  std::vector<double> values(static_cast<std::size_t>(window.size()));
  const BinRange all{0, window.size() - 1};
  const auto read = [&](auto part) {
    for (std::size_t j = 0; j < values.size(); ++j) {
      values[j] = part(spectrum[static_cast<std::size_t>(window.first) + j]);
    }
    return RmsAboutBaseline(values, all);
  };
  double rms = read([](const std::complex<double>& bin) { return bin.real(); });
  const int quadratures = transform.complex() ? 2 : 1;
  if (quadratures == 2) {
    const double other = read([](const std::complex<double>& bin) { return bin.imag(); });
    rms = std::sqrt(0.5 * (rms * rms + other * other));
  }
  NoiseWindowReading reading;
  reading.points = IndependentPoints(window, transform);
  reading.relative_deviation = 1 / std::sqrt(2 * quadratures * reading.points);
  reading.excess = rms > 0 ? rms / unit : 1;
  return reading;
}

}  // namespace lastscan::engine
