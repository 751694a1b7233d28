#include "rehearsal/invented_run.h"

#include <algorithm>
#include <boost/random/normal_distribution.hpp>
#include <cmath>
#include <numbers>
#include <span>
#include <utility>

namespace lastscan::rehearsal {
namespace {

constexpr std::uint64_t kMostBlocks = 64;     // where each block needs its own signal
constexpr std::uint64_t kMostWeights = 4096;  // where a block needs a number only

using OfScan = std::function<double(std::uint64_t)>;

double At(const OfScan& function, std::uint64_t scan, double otherwise) {
  return function ? function(scan) : otherwise;
}

// Scans first..last in at most `most` runs of nearly equal length:
// visit(middle scan, how many).
template <typename Visit>
void ForBlocks(std::uint64_t first, std::uint64_t last, std::uint64_t most, Visit visit) {
  const std::uint64_t scans = last - first + 1;
  const std::uint64_t blocks = std::min(scans, most);
  for (std::uint64_t i = 0; i < blocks; ++i) {
    const std::uint64_t begin = first + i * scans / blocks;
    const std::uint64_t end = first + (i + 1) * scans / blocks;
    visit(begin + (end - begin - 1) / 2, end - begin);
  }
}

Decay DecayOf(const InventedSample& sample, const InventedLine& line, double amplitude,
              double shifted_hz, double added_width_hz) {
  const double hz =
      (line.shift_ppm - sample.centre_shift_ppm) * sample.observe_frequency_mhz + shifted_hz;
  return {std::polar(amplitude, sample.phase_radians + line.phase_radians),
          hz / sample.spectral_width_hz,
          std::numbers::pi * (line.width_hz + added_width_hz) / sample.spectral_width_hz};
}

// The amplitude that gives the line its true height.
double AmplitudeFor(const InventedSample& sample, const InventedLine& line,
                    const ReceiverFilter& filter) {
  const double weight_rate = std::numbers::pi * sample.broadening_hz / sample.spectral_width_hz;
  const SpectrumGain gain =
      GainOfSpectrum(DecayOf(sample, line, 1, 0, 0), filter, weight_rate, sample.points);
  return line.signal_to_noise_per_scan * sample.noise_rms * gain.noise / gain.height;
}

// Drift and width in steps that no spectrum can tell apart, so that scans with
// the same lines share one signal.
double InSteps(double hz) { return std::round(hz / 0.01) * 0.01; }

void Add(double factor, std::span<const std::complex<double>> signal, std::vector<double>& sum) {
  for (std::size_t t = 0; t < signal.size(); ++t) {
    sum[2 * t] += factor * signal[t].real();
    sum[2 * t + 1] += factor * signal[t].imag();
  }
}

}  // namespace

InventedRun::InventedRun(InventedSample sample, std::uint64_t seed)
    : sample_(std::move(sample)),
      filter_(sample_.receiver_delay_points),
      random_(seed),
      scan_(sample_.points),
      sum_(2 * std::size_t{sample_.points}) {
  for (const InventedLine& line : sample_.lines) {
    amplitudes_.push_back(AmplitudeFor(sample_, line, filter_));
    AddDecay(DecayOf(sample_, line, amplitudes_.back(), 0, 0), filter_, scan_);
  }
  if (sample_.spur) {
    // It comes from the electronics and does not wait for the receiver.
    const ReceiverFilter none(0);
    spur_.resize(sample_.points);
    const double amplitude = AmplitudeFor(sample_, *sample_.spur, none);
    AddDecay(DecayOf(sample_, *sample_.spur, amplitude, 0, 0), none, spur_);
  }
}

void InventedRun::AddSignal(std::uint64_t first, std::uint64_t last) {
  double spur_weight = 0;
  double line_weight = 0;
  ForBlocks(first, last, kMostWeights, [&](std::uint64_t scan, std::uint64_t scans) {
    const double gain = At(sample_.gain, scan, 1) * static_cast<double>(scans);
    spur_weight += gain;
    line_weight += gain * At(sample_.amplitude, scan, 1);
  });
  if (!spur_.empty()) Add(spur_weight, spur_, sum_);
  if (!sample_.drift_hz && !sample_.extra_width_hz) {
    Add(line_weight, scan_, sum_);
    return;
  }
  // Neighbouring blocks with the same lines share one signal.
  double shifted = 0;
  double widened = 0;
  double weight = 0;
  const auto flush = [&] {
    if (weight == 0) return;
    if (shifted == 0 && widened == 0) {
      Add(weight, scan_, sum_);
      return;
    }
    Points signal(sample_.points);
    for (std::size_t i = 0; i < sample_.lines.size(); ++i) {
      // A line keeps its area: broader is lower.
      AddDecay(DecayOf(sample_, sample_.lines[i], weight * amplitudes_[i], shifted, widened),
               filter_, signal);
    }
    Add(1, signal, sum_);
  };
  ForBlocks(first, last, kMostBlocks, [&](std::uint64_t scan, std::uint64_t scans) {
    const double drift = InSteps(At(sample_.drift_hz, scan, 0));
    const double width = InSteps(At(sample_.extra_width_hz, scan, 0));
    if (drift != shifted || width != widened) {
      flush();
      shifted = drift;
      widened = width;
      weight = 0;
    }
    const std::uint64_t begin = scan - (scans - 1) / 2;
    ForBlocks(begin, begin + scans - 1, kMostWeights, [&](std::uint64_t s, std::uint64_t count) {
      weight += static_cast<double>(count) * At(sample_.gain, s, 1) * At(sample_.amplitude, s, 1);
    });
  });
  flush();
}

void InventedRun::AddNoise(std::uint64_t first, std::uint64_t last) {
  double variance = 0;
  ForBlocks(first, last, kMostWeights, [&](std::uint64_t scan, std::uint64_t scans) {
    const double factor = At(sample_.gain, scan, 1) * At(sample_.noise, scan, 1);
    variance += static_cast<double>(scans) * factor * factor;
  });
  const double rms = sample_.noise_rms * std::sqrt(variance);
  boost::random::normal_distribution<double> normal(0, 1);
  for (double& value : sum_) value += rms * normal(random_);
}

formats::Recording InventedRun::AdvanceTo(std::uint64_t scans_done) {
  AddSignal(scans_done_ + 1, scans_done);
  AddNoise(scans_done_ + 1, scans_done);
  scans_done_ = scans_done;

  formats::Recording recording;
  v1::Snapshot& snapshot = recording.snapshot;
  snapshot.set_run(sample_.run);
  snapshot.set_instrument(sample_.instrument);
  snapshot.set_sample(sample_.sample);
  snapshot.set_nucleus(sample_.nucleus);
  snapshot.set_observe_frequency_mhz(sample_.observe_frequency_mhz);
  snapshot.set_spectral_width_hz(sample_.spectral_width_hz);
  snapshot.set_centre_shift_ppm(sample_.centre_shift_ppm);
  snapshot.set_domain(v1::FID);
  snapshot.set_encoding(v1::FLOAT64);
  snapshot.set_points(sample_.points);
  snapshot.set_scans_done(scans_done);
  snapshot.set_scans_planned(sample_.scans_planned);
  snapshot.set_accumulation(sample_.accumulation);
  snapshot.set_phase_cycle(sample_.phase_cycle);
  const double elapsed = static_cast<double>(scans_done) * sample_.seconds_per_scan;
  const double whole = std::floor(elapsed);
  snapshot.mutable_recorded_at()->set_seconds(started_at_ + static_cast<std::int64_t>(whole));
  snapshot.mutable_recorded_at()->set_nanos(static_cast<std::int32_t>((elapsed - whole) * 1e9));
  if (sample_.lock_level) snapshot.set_lock_level(sample_.lock_level(scans_done));
  if (sample_.gain_reported) {
    snapshot.set_receiver_gain_db(20 * std::log10(At(sample_.gain, scans_done, 1)));
  }
  recording.has_centre_shift = true;
  recording.title = sample_.sample;
  recording.samples = sum_;
  if (sample_.accumulation == v1::MEAN) {
    for (double& value : recording.samples) value /= static_cast<double>(scans_done);
  }
  if (sample_.rounded) {
    for (double& value : recording.samples) value = std::round(value);
  }
  return recording;
}

double InventedRun::TrueSignalToNoise(std::size_t index, double scans) const {
  return sample_.lines.at(index).signal_to_noise_per_scan * std::sqrt(scans);
}

}  // namespace lastscan::rehearsal
