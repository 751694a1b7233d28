// Invented runs whose truth is known: the scenarios behind `lastscan rehearse`,
// the demo and tests/nights. After n scans the accumulated FID is
// F(n) = n s + sqrt(n) noise, built from independent increments, so that any
// rule can be judged against what is really there.
#pragma once

#include <complex>
#include <cstddef>
#include <cstdint>
#include <functional>
#include <optional>
#include <random>
#include <string>
#include <vector>

#include "formats/recording.h"
#include "lastscan/v1/snapshot.pb.h"
#include "rehearsal/decay.h"

namespace lastscan::rehearsal {

struct InventedLine {
  double shift_ppm = 0;
  double width_hz = 1;  // full width at half height, before broadening
  // True height over the rms noise after one scan, in the spectrum broadened
  // by `InventedSample::broadening_hz`.
  double signal_to_noise_per_scan = 0;
  double phase_radians = 0;  // added to the phase of the whole spectrum
};

// Everything that is true of an invented run. Members set after the fact make
// the fault scenarios; all functions take the number of the scan (1-based).
struct InventedSample {
  std::string run = "rehearsal";
  std::string instrument = "bench-1";
  std::string sample = "invented sample";
  std::string nucleus = "13C";
  double observe_frequency_mhz = 100.6;
  double spectral_width_hz = 24000;
  double centre_shift_ppm = 100;
  std::uint32_t points = 16384;  // complex
  double broadening_hz = 1.0;
  double receiver_delay_points = 0;  // build-up before the first true point
  double phase_radians = 0;
  double noise_rms = 1000;  // per point and quadrature, one scan
  std::vector<InventedLine> lines;
  std::uint64_t scans_planned = 1024;
  std::uint32_t phase_cycle = 8;
  double seconds_per_scan = 2.5;
  v1::Accumulation accumulation = v1::SUM;
  bool rounded = false;  // samples rounded to whole numbers

  // Faults. Unset: none.
  std::function<double(std::uint64_t)> amplitude;       // factor on all lines
  std::function<double(std::uint64_t)> drift_hz;        // added to all lines
  std::function<double(std::uint64_t)> extra_width_hz;  // added to all widths
  std::function<double(std::uint64_t)> gain;            // factor on signal and noise
  std::function<double(std::uint64_t)> noise;           // factor on the noise alone
  std::function<double(std::uint64_t)> lock_level;      // 0..1, reported
  bool gain_reported = false;                           // the export states the gain, in dB over 1
  // Coherent with the scans, there whether the sample is excited or not: no
  // build-up, and untouched by `amplitude`, `drift_hz` and `extra_width_hz`.
  std::optional<InventedLine> spur;
};

// Gives the snapshots of one invented run, in order.
//
// With a receiver delay of d points the FID is what a symmetric low-pass filter
// of the spectral width makes of a signal that sets in at point d: a build-up
// symmetric about d, then the signal delayed by d. The noise is white.
//
// Without drift or added width the signal of one scan is computed once and
// faults of amplitude and gain are exact to the scan in increments of up to
// 4,096 scans; with drift or added width an increment is put together from at
// most 64 blocks of scans, in steps of 0.01 Hz. The same sample, seed and calls
// give the same samples.
class InventedRun {
 public:
  // REQUIRES: points >= 2, positive widths, frequencies and noise; lines inside
  // the spectral width.
  InventedRun(InventedSample sample, std::uint64_t seed);

  // Adds scans up to `scans_done` and returns the accumulation as a spectrometer
  // would export it, recorded_at counted from `started_at` (Unix seconds).
  // Whether a snapshot is final, its goal and its booking are the caller's.
  // REQUIRES: scans_done greater than at the call before.
  formats::Recording AdvanceTo(std::uint64_t scans_done);

  const InventedSample& truth() const { return sample_; }

  // True signal-to-noise (height over rms) of line `index` after `scans` scans,
  // without faults. The height is that of the line alone, in the spectrum made
  // with weights exp(-pi broadening t) counted from the first true point, the
  // first point halved where there is no delay, and nothing else.
  double TrueSignalToNoise(std::size_t index, double scans) const;

  void set_started_at(std::int64_t unix_seconds) { started_at_ = unix_seconds; }

 private:
  using Points = std::vector<std::complex<double>>;

  void AddSignal(std::uint64_t first, std::uint64_t last);
  void AddNoise(std::uint64_t first, std::uint64_t last);

  InventedSample sample_;
  ReceiverFilter filter_;
  std::mt19937_64 random_;
  std::int64_t started_at_ = 1'800'000'000;
  std::uint64_t scans_done_ = 0;
  std::vector<double> amplitudes_;  // of `lines`, at their true onset
  Points scan_;                     // signal of one scan without faults
  Points spur_;                     // of one scan; empty without a spur
  std::vector<double> sum_;         // interleaved, all scans so far
};

}  // namespace lastscan::rehearsal
