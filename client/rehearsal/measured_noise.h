// The noise in a finished accumulation, measured although lines are present:
// what a bridge between its first and last scan must be made of.
#pragma once

#include <random>
#include <vector>

#include "formats/recording.h"

namespace lastscan::rehearsal {

// What was measured. The noise is taken to be white inside the receiver's
// passband and lower outside of it, never higher: an excess is signal.
struct MeasuredNoise {
  static constexpr int kBands = 64;

  // Root mean square of the noise alone, of each quadrature of a complex point
  // (FID) or of a real point (spectrum), averaged over the points, in the units
  // of the samples as they stand: a sum's rms grows with the root of the scans,
  // a mean's falls with it.
  double rms = 0;

  // Power over the spectral width in kBands equal bands, 1 inside the passband
  // and down to 0 outside. FID: from the lowest to the highest frequency of the
  // samples as they stand; spectrum: in the order of its samples.
  std::vector<double> passband;

  // Spectra only (empty for an FID): the power spectrum of the noise along the
  // points, evenly from 0 to half a cycle per point, mean 1. Flat where
  // neighbours are independent; zero filling and broadening make it fall.
  std::vector<double> along_points;

  // Last points of an FID that hold exact zeros: filled in, never acquired.
  std::size_t filled_points = 0;
};

// An FID is weighted with a window that starts and ends smoothly, so that its
// lines have no feet, and each band is read from the bins below the lines; where
// the second half of the FID is clearly quieter than the whole, as in a crowded
// spectrum, the second half is read. A spectrum is read in its quiet stretches.
// Throws formats::Unreadable for fewer than 64 points, or a sample that is not
// a finite number.
MeasuredNoise MeasureNoise(const formats::Recording& finished);

// The same by domain; `samples` interleaved for an FID, real for a spectrum.
// REQUIRES: at least 64 points, finite samples.
MeasuredNoise MeasureFidNoise(const std::vector<double>& samples);
MeasuredNoise MeasureSpectrumNoise(const std::vector<double>& samples);

// Noise with the level and shape of `noise` and as many samples as `samples`
// of the recording it was measured in: interleaved for an FID.
std::vector<double> DrawNoise(const MeasuredNoise& noise, std::size_t samples,
                              std::mt19937_64& random);

}  // namespace lastscan::rehearsal
