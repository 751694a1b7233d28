// Signal-to-noise ratios as laboratories state them, and their conversion.
//   height over rms:        H / s
//   height over twice rms:  H / (2 s)
//   peak to peak:           2.5 H / h, h = d2(M) s the expected peak-to-peak
//                           noise of M independent points (the factor 2.5 of
//                           the pharmacopoeias and ASTM E386)
#pragma once

#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

// Points that are taken for peak-to-peak noise when no noise window is named:
// with 100 points h is 5.0 rms, so that 2.5 H/h is H over twice the rms.
inline constexpr double kUsualNoisePoints = 100;

// Tippett's range constant d2(M): expected range of M independent standard
// normal values (Tippett, Biometrika 1925, 17, 364), by integration of
// 1 - F^M - (1-F)^M. REQUIRES: count >= 2; need not be whole.
double ExpectedRange(double count);

// Ratio in `convention` over ratio of height to rms. `noise_points` is the
// number of independent points of the noise window.
double ConventionFactor(v1::Convention convention, double noise_points = kUsualNoisePoints);

}  // namespace lastscan::engine
