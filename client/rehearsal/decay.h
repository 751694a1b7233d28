// One exponentially damped line in the time domain, as a digital receiver
// delivers it: the atom that invented runs are made of.
#pragma once

#include <complex>
#include <cstddef>
#include <span>
#include <vector>

namespace lastscan::rehearsal {

// The receiver's low-pass filter: it delays the signal by so many points, which
// need not be whole, and precedes it by a build-up symmetric about the delay.
// The kernel h is a sinc cut by a Kaiser window (Kaiser 1974), its half length L
// the delay but at least 16 points: half height at the edges of the spectral
// width, flat within 1e-4 over 95 % of it for L = 68.
class ReceiverFilter {
 public:
  // 0: no filter at all; the signal sets in with the first point.
  // REQUIRES: delay_points >= 0.
  explicit ReceiverFilter(double delay_points);

  double delay_points() const { return delay_points_; }
  bool present() const { return delay_points_ > 0; }

  // For a line exp(z t), t in points from the onset: the integral of
  // h(u) exp(-z u) from -L to k - delay, for k = 0, 1, 2, ... to the first k at
  // which it is complete; that last value holds for all later points.
  // REQUIRES: present().
  std::vector<std::complex<double>> BuildUp(std::complex<double> z) const;

 private:
  double delay_points_;
  double start_ = 0;            // of kernel_, in points from the centre
  std::size_t before_ = 0;      // points of the kernel before the first of the FID
  std::vector<double> kernel_;  // evenly spaced, some samples a point
};

struct Decay {
  std::complex<double> amplitude = 1;  // at the onset
  double cycles_per_point = 0;         // -0.5 to 0.5; positive: a higher shift
  double rate_per_point = 0;           // of damping: pi times width over spectral width
};

// Adds the line to `points`.
void AddDecay(const Decay& decay, const ReceiverFilter& filter,
              std::span<std::complex<double>> points);

// Height of the line of amplitude 1 and rms of a white noise of rms 1 in a
// spectrum with weights w = exp(-weight_rate t), t counted from the onset:
// |sum w s exp(-2 pi i cycles t)| and sqrt(sum w^2), the first point halved
// where there is no filter.
struct SpectrumGain {
  double height = 0;
  double noise = 0;
};
SpectrumGain GainOfSpectrum(const Decay& decay, const ReceiverFilter& filter, double weight_rate,
                            std::size_t points);

}  // namespace lastscan::rehearsal
