#include "engine/advice/amplitude_history.h"

#include <algorithm>
#include <cmath>

namespace lastscan::engine {

void AmplitudeHistory::Start(std::span<const std::ptrdiff_t> bins,
                             std::span<const std::complex<double>> accumulation, double scans,
                             double noise_per_scan, int quadratures) {
  reference_.clear();
  double power = 0;
  for (std::ptrdiff_t bin : bins) {
    const std::complex<double> height = accumulation[static_cast<std::size_t>(bin)] / scans;
    reference_.push_back({bin, height});
    power += std::norm(height);
  }
  const double noise_power = static_cast<double>(quadratures) * static_cast<double>(bins.size()) *
                             noise_per_scan * noise_per_scan / scans;
  power_ = std::max(power - noise_power, 0.25 * power);
  deviation_ = noise_per_scan * std::sqrt(power) / power_;
  blocks_ = {{scans, scans, scans}};
}

double AmplitudeHistory::Add(std::span<const std::complex<float>> before,
                             std::span<const std::complex<double>> after, double scans_before,
                             double scans_after) {
  double amplitude = 0;
  for (const Reference& line : reference_) {
    const auto bin = static_cast<std::size_t>(line.bin);
    amplitude += (std::conj(line.height) * (after[bin] - std::complex<double>(before[bin]))).real();
  }
  amplitude /= power_;
  const double scans = scans_after - scans_before;
  blocks_.push_back({scans_after, scans, amplitude});
  if (blocks_.size() > kMostBlocks) {
    std::vector<Block> merged;
    for (std::size_t i = 0; i + 1 < blocks_.size(); i += 2) {
      merged.push_back({blocks_[i + 1].last_scan, blocks_[i].scans + blocks_[i + 1].scans,
                        blocks_[i].amplitude + blocks_[i + 1].amplitude});
    }
    if (blocks_.size() % 2 == 1) merged.push_back(blocks_.back());
    blocks_ = std::move(merged);
  }
  return amplitude / scans;
}

double AmplitudeHistory::DeviationOf(double scans) const { return deviation_ / std::sqrt(scans); }

std::optional<AmplitudeChange> AmplitudeHistory::Change(double least_significance) const {
  double total_scans = 0;
  double total_amplitude = 0;
  for (const Block& block : blocks_) {
    total_scans += block.scans;
    total_amplitude += block.amplitude;
  }
  std::optional<AmplitudeChange> found;
  double scans = 0;
  double amplitude = 0;
  for (std::size_t i = 0; i + 1 < blocks_.size(); ++i) {
    scans += blocks_[i].scans;
    amplitude += blocks_[i].amplitude;
    const double before = amplitude / scans;
    const double after = (total_amplitude - amplitude) / (total_scans - scans);
    const double deviation = deviation_ * std::sqrt(1 / scans + 1 / (total_scans - scans));
    const double significance = std::abs(before - after) / deviation;
    if (significance >= least_significance && (!found || significance > found->significance)) {
      found = AmplitudeChange{before > 0 ? after / before : 1, blocks_[i].last_scan, significance};
    }
  }
  return found;
}

void AmplitudeHistory::SaveTo(state::Run& state) const {
  for (const Reference& line : reference_) {
    state::ReferenceLine& saved = *state.add_reference();
    saved.set_bin(line.bin);
    saved.set_real(line.height.real());
    saved.set_imaginary(line.height.imag());
  }
  for (const Block& block : blocks_) {
    state::AmplitudeBlock& saved = *state.add_amplitude();
    saved.set_last_scan(block.last_scan);
    saved.set_scans(block.scans);
    saved.set_amplitude(block.amplitude);
  }
  state.set_reference_deviation(deviation_);
  state.set_reference_power(power_);
}

void AmplitudeHistory::RestoreFrom(const state::Run& state) {
  reference_.clear();
  blocks_.clear();
  for (const auto& saved : state.reference()) {
    reference_.push_back(
        {static_cast<std::ptrdiff_t>(saved.bin()), {saved.real(), saved.imaginary()}});
  }
  for (const auto& saved : state.amplitude()) {
    blocks_.push_back({saved.last_scan(), saved.scans(), saved.amplitude()});
  }
  deviation_ = state.reference_deviation();
  power_ = state.reference_power();
}

}  // namespace lastscan::engine
