// One look at an invented FID with the sensitivity part alone: its spectrum in
// units of the noise, the peaks and the lines read from it.
#pragma once

#include <cmath>
#include <numbers>
#include <optional>
#include <vector>

#include "engine/sensitivity/lines.h"
#include "engine/spectrum/transform.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {

// Damping per point of a line of so many Hz in the FIDs of PlainSnapshot.
inline double RateOf(double width_hz) { return std::numbers::pi * width_hz / 2000; }

// The amplitude at which a line of `width_hz` reads `z` in the transformed
// noise of `rms` per point.
inline double AmplitudeFor(double z, double width_hz, double broadening_hz, std::size_t points,
                           const Transform& transform, double rms = 1) {
  const double step = RateOf(width_hz + broadening_hz);
  const double height = std::expm1(-step * static_cast<double>(points)) / std::expm1(-step) - 0.5;
  return z * rms * transform.noise_gain() / height;
}

struct Look {
  // `rms` is the noise per point of `fid`. As after 64 scans of a run whose
  // first snapshot had 64 scans.
  Look(const Points& fid, double broadening_hz, double rms = 1,
       std::optional<PhaseModel> phase = {})
      : transform(PlainSnapshot(static_cast<std::uint32_t>(fid.size())), broadening_hz),
        bins(transform.Apply(fid)),
        evidence(64, 16, 2) {
    scaled.axis = transform.axis();
    scaled.bins = bins;
    scaled.unit = rms * transform.noise_gain();
    scaled.fill_ratio = transform.fill_ratio();
    scaled.acquisition_seconds = transform.acquisition_seconds();
    scaled.phase = phase;
    curve = ReadingCurve(scaled);
    peaks = FindPeaks(curve, 4);
    lines = ReadLines(scaled, curve, peaks, evidence);
  }
  Look(const Look&) = delete;

  // Lines whose evidence is enough for the whole spectrum at 1 in 100.
  std::vector<Line> Sure() const {
    const double level = std::log(static_cast<double>(curve.size()) / 0.01);
    std::vector<Line> sure;
    for (const Line& line : lines) {
      if (line.log_evidence >= level) sure.push_back(line);
    }
    return sure;
  }

  Transform transform;
  Points bins;
  ScaledSpectrum scaled;
  MixtureEvidence evidence;
  std::vector<double> curve;
  std::vector<Peak> peaks;
  std::vector<Line> lines;
};

// The phase of an FID whose lines are all of phase `radians`.
inline PhaseModel ConstantPhase(double radians, std::ptrdiff_t bins) {
  return {radians, 0, 0, bins / 2};
}

}  // namespace lastscan::engine
