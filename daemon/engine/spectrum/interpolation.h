// Readings between the bins. A line almost never sits on a bin; read at the
// nearest one its height is low by up to 14 %.
#pragma once

#include <complex>
#include <span>

namespace lastscan::engine {

// The spectrum of an FID of `points` points, zero-filled to bins.size() of at
// least twice as many, at the fractional `bin`. The FID is of finite length,
// so its spectrum is band-limited and the value between bins follows from the
// bins by a Kaiser-windowed sinc (Kaiser 1974; 16 taps, error below 1e-4 of
// the largest value near by). The spectrum is periodic: bins wrap around.
std::complex<double> ValueBetweenBins(std::span<const std::complex<double>> bins, double fill_ratio,
                                      double bin);

struct Maximum {
  double bin = 0;
  double height = 0;
};

// Top of a sampled real curve through three neighbours, the middle one the
// highest: of the Lorentzian through them (1/y is a parabola) where all are
// positive and the sides are over a fifth of the middle, else of the parabola.
Maximum TopOfThree(double left, double middle, double right, double middle_bin);

}  // namespace lastscan::engine
