// Phase of the spectrum: one constant, and the linear part that a receiver
// delay of so many points causes. Estimated from confirmed lines; until the
// model is known, magnitudes are read instead.
#pragma once

#include <complex>
#include <optional>
#include <span>
#include <vector>

#include "engine/spectrum/axis.h"

namespace lastscan::engine {

// What one confirmed line tells about the phase.
struct LinePhase {
  double bin = 0;                // fractional
  std::complex<double> reading;  // in units of the noise rms per quadrature
};

struct PhaseModel {
  double constant_radians = 0;  // at the middle of the spectrum
  double delay_points = 0;
  double radians_per_bin = 0;  // -2 pi delay / bins
  std::ptrdiff_t middle_bin = 0;

  double At(double bin) const {
    return constant_radians + radians_per_bin * (bin - static_cast<double>(middle_bin));
  }
};

// The delay in points at which the FID sets in, from its energy, good to a few
// points; empty when the onset does not stand out of the noise.
// `rms` is the noise per quadrature and point.
std::optional<double> OnsetOfFid(std::span<const std::complex<double>> fid, double rms);

// The phase model that the lines support, or nothing when they do not settle
// it: too few or too weak lines, two delays that explain them equally well, or
// lines that follow no common phase. `given_delay` is the snapshot's, when it
// gives one; `onset` narrows the search. Fit: maximum of sum (z^2/2) cos(residual), the von Mises
// likelihood of phases with variance 2/z^2.
std::optional<PhaseModel> FitPhase(const Axis& axis, std::span<const LinePhase> lines,
                                   std::optional<double> given_delay, std::optional<double> onset);

// How much of each line's own noise went into the phase it is read with (its
// leverage in the fit): 1 for a single line, near 0 for a weak line among
// strong ones. `lines` are those the model was fitted to.
std::vector<double> PhaseLeverages(std::span<const LinePhase> lines);

}  // namespace lastscan::engine
