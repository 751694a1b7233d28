// Finds lines in a spectrum: local maxima that stand apart from stronger
// neighbours, with the evidence that each is more than noise.
#pragma once

#include <complex>
#include <optional>
#include <span>
#include <vector>

#include "engine/sensitivity/evidence.h"
#include "engine/spectrum/axis.h"
#include "engine/spectrum/phase.h"

namespace lastscan::engine {

// A spectrum in the units of its noise: what all readings are taken from.
struct ScaledSpectrum {
  Axis axis;
  std::span<const std::complex<double>> bins;  // accumulation, as transformed
  double unit = 1;                             // rms noise per quadrature of a bin
  double fill_ratio = 1;
  double acquisition_seconds = 0;   // 0: came as a spectrum
  bool complex = true;              // false: real, phased
  std::optional<PhaseModel> phase;  // of complex bins, once known

  int quadratures() const { return complex ? 2 : 1; }
};

// The curve that lines are sought on: real readings where the phase is known,
// magnitudes where it is not. In units of the noise.
std::vector<double> ReadingCurve(const ScaledSpectrum& spectrum);

struct Peak {
  std::ptrdiff_t bin = 0;
  double height = 0;
  double saddle = 0;  // the higher of the two dips towards higher ground
};

// All local maxima of `curve` of at least `least_height`, with their saddles, in
// one pass; highest first.
std::vector<Peak> FindPeaks(std::span<const double> curve, double least_height);

struct Line {
  double bin = 0;                // interpolated
  std::complex<double> reading;  // at that place, in units of the noise
  double height = 0;             // reading in phase (or magnitude), same units
  double chosen = 1;             // quantities chosen from the same data
  double width_hz = 0;           // full width at half height, as it stands
  double log_evidence = 0;       // ln of the evidence summed over its bins
  std::ptrdiff_t nearest_bin = 0;
};

// Reads the lines among `peaks` that stand apart from stronger ones: not the
// ripple of noise or truncation on a strong line's foot. Highest first.
std::vector<Line> ReadLines(const ScaledSpectrum& spectrum, std::span<const double> curve,
                            std::span<const Peak> peaks, const MixtureEvidence& evidence);

// Where the magnitude near `line` is highest, and the reading there: what the
// line tells of the phase. The place at which a line reads highest in a phase
// agrees with that phase by construction and tells nothing.
// REQUIRES: spectrum.complex.
LinePhase PhaseOf(const ScaledSpectrum& spectrum, const Line& line);

// Settles how lines read with `phase` count: one whose own phase follows the
// model has chosen its position, and of the phase what its leverage says; one
// that does not follow is read by its magnitude. `fitted` are the lines the
// model was fitted to.
void ApplyPhase(const PhaseModel& phase, std::span<const LinePhase> fitted, std::span<Line> lines);

}  // namespace lastscan::engine
