// The noise as a lab reads it: in a named window of the processed spectrum.
#pragma once

#include <complex>
#include <span>

#include "engine/spectrum/axis.h"
#include "engine/spectrum/transform.h"

namespace lastscan::engine {

struct NoiseWindowReading {
  double excess = 1;              // rms in the window over the rms expected of noise
  double relative_deviation = 0;  // standard deviation of `excess` over it
  double points = 0;              // independent points, of one quadrature
};

// The bins of a noise window. Throws Refusal if it lies outside the spectrum or
// holds fewer than five independent points.
BinRange NoiseWindowBins(const v1::ShiftRange& window, const Transform& transform);

// The rms about a straight base line, both quadratures together (a phase mixes
// them, noise does not mind), over `unit`.
NoiseWindowReading ReadNoiseWindow(std::span<const std::complex<double>> spectrum, BinRange window,
                                   const Transform& transform, double unit);

}  // namespace lastscan::engine
