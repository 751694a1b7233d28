// The noise of one scan, read from the scatter of the increments.
//
// With increments D_k of m_k scans, S = sum D_k and n = sum m_k, the scatter
//   q = sum |D_k|^2 / m_k - |S|^2 / n
// of a bin holds no constant signal at all: it is sigma^2 times chi-square with
// K - 1 degrees of freedom per quadrature. The median over the bins is robust
// against lines that are not constant.
#pragma once

#include <complex>
#include <span>
#include <vector>

#include "engine/spectrum/axis.h"

namespace lastscan::engine {

struct NoiseEstimate {
  double per_scan = 0;            // rms per quadrature of a bin, one scan
  double relative_deviation = 0;  // standard deviation of that number over it
  bool from_increments = false;
};

// Median of chi-square with `degrees` degrees of freedom (Boost.Math).
double ChiSquareMedian(double degrees);

// Relative standard deviation of a sigma found as the root of the median of
// `count` independent values of sigma^2 chi-square with `degrees`.
double RelativeDeviationOfMedian(double degrees, double count);

// Keeps q per bin. The update (Chan, Golub and LeVeque 1983)
//   q += |D/m - S/n|^2 m n / (n + m)
// has no cancellation, so single precision holds it under any line.
class Scatter {
 public:
  bool empty() const { return scatter_.empty(); }
  int increments() const { return increments_; }
  const std::vector<float>& values() const { return scatter_; }
  const std::vector<std::complex<float>>& sum() const { return sum_; }
  double scans() const { return scans_; }

  // Takes the accumulation after `scans` scans; the increment is what it adds.
  // Returns the noise per scan of that increment alone, given `before`, that of
  // the scans before it; 0 at the first call. Like the scatter it sees no
  // constant line. `complex`: bins carry two quadratures; `fill_ratio` thins
  // out bins that zero-filling merely interpolated.
  // REQUIRES: scans > scans(), same number of bins each time.
  double Add(std::span<const std::complex<double>> accumulated, double scans, double before,
             bool complex, double fill_ratio);

  // REQUIRES: increments() >= 2.
  NoiseEstimate Estimate(bool complex, double fill_ratio, double independent_bins) const;

  void Restore(std::vector<std::complex<float>> sum, std::vector<float> scatter, double scans,
               int increments);

 private:
  std::vector<std::complex<float>> sum_;
  std::vector<float> scatter_;
  double scans_ = 0;
  int increments_ = 0;
};

// The noise when there is one snapshot only. Of an FID: its points (summed over
// `scans`) are weighted with sin^4, which starts and ends so smoothly that even
// the strongest line has no feet, transformed, and read in the quietest bands.
// Per point and quadrature; Transform::noise_gain leads to the spectrum.
NoiseEstimate NoiseOfFid(std::span<const std::complex<double>> summed, double scans);

// The same of data that are a spectrum, or of the broadened spectrum of an FID
// (then feet of strong lines are part of what is read). `spectrum` is the accumulation after
// `scans` scans; its bands are compared by their median power and the lower quartile of the bands
// is taken, which is right as long as most of the spectrum is free of lines, and at most one band's
// own scatter high (some 12 % with 64 bands of 128 bins) when hardly more than a quarter is.
NoiseEstimate NoiseOfQuietBands(std::span<const std::complex<double>> spectrum, double scans,
                                bool complex, double fill_ratio, double independent_bins);

// Mean over `range` of the squared deviation from the range's straight base
// line, rooted: what a lab reads as rms in its noise window. Of the real parts.
// REQUIRES: range.size() >= 3.
double RmsAboutBaseline(std::span<const double> real, BinRange range);

}  // namespace lastscan::engine
