// From an FID to its broadened, zero-filled spectrum. All of it is linear, so
// the spectrum of a sum of scans is the sum of the spectra: one transform per
// snapshot serves the whole accumulation and, by subtraction, each increment.
#pragma once

#include <complex>
#include <vector>

#include "engine/spectrum/axis.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

class Transform {
 public:
  // `broadening_hz` is the width that the exponential weights exp(-pi b t) add
  // to each line. It is ignored for data that are a spectrum already.
  Transform(const v1::Snapshot& snapshot, double broadening_hz);

  const Axis& axis() const { return axis_; }
  bool complex() const { return fid_; }

  // Points over zero-filled points: the share of a bin that is independent.
  double fill_ratio() const;

  // Degrees of freedom among the bins for a variance estimate: weights make
  // neighbouring bins alike. Real values: (sum w^2)^2 / sum w^4 of the weights.
  double independent_bins() const { return independent_bins_; }

  // Seconds that the FID lasts; 0 when the data came as a spectrum.
  double acquisition_seconds() const { return acquisition_seconds_; }

  // sqrt(sum w^2): rms per quadrature in a bin over rms per quadrature in a point.
  double noise_gain() const { return noise_gain_; }

  // Weights, first point halved, zero fill to a power of two of at least twice
  // the points, FFT, zero frequency to the middle. A spectrum is passed through.
  // REQUIRES: summed.size() == points of the snapshot given to the constructor.
  std::vector<std::complex<double>> Apply(std::vector<std::complex<double>> summed) const;

 private:
  bool fid_;
  std::size_t points_;
  Axis axis_;
  double decay_per_point_ = 0;  // pi * broadening * dwell time
  double acquisition_seconds_ = 0;
  double independent_bins_ = 0;
  double noise_gain_ = 1;
};

}  // namespace lastscan::engine
