#include "rehearsal/retrace.h"

#include <algorithm>
#include <cmath>
#include <utility>

namespace lastscan::rehearsal {

Retrace::Retrace(formats::Recording finished, std::uint64_t seed)
    : finished_(std::move(finished)),
      noise_(MeasureNoise(finished_)),
      random_(seed),
      bridge_(finished_.samples.size()) {}

formats::Recording Retrace::AdvanceTo(std::uint64_t scans) {
  formats::Recording recording = finished_;
  const std::uint64_t all = finished_.snapshot.scans_done();
  recording.snapshot.set_scans_done(scans);
  if (scans == all) {
    scans_done_ = scans;
    return recording;
  }
  // From the scan before, at b(m), the bridge to 0 at N is normal at n with
  // mean b(m) (N-n)/(N-m) and variance (n-m)(N-n)/(N-m) of one scan's noise.
  const double total = static_cast<double>(all);
  const double now = static_cast<double>(scans);
  const double before = static_cast<double>(scans_done_);
  const double left = (total - now) / (total - before);
  const bool mean = finished_.snapshot.accumulation() == v1::MEAN;
  // rms of one scan: a sum's rms is sqrt(N) times it, a mean's 1 / sqrt(N).
  const double of_one_scan = mean ? std::sqrt(total) : 1 / std::sqrt(total);
  const double step = of_one_scan * std::sqrt((now - before) * left);
  const std::vector<double> drawn = DrawNoise(noise_, bridge_.size(), random_);
  for (std::size_t i = 0; i < bridge_.size(); ++i) {
    bridge_[i] = left * bridge_[i] + step * drawn[i];
    recording.samples[i] = mean ? finished_.samples[i] + bridge_[i] / now
                                : finished_.samples[i] * (now / total) + bridge_[i];
  }
  scans_done_ = scans;
  return recording;
}

std::vector<std::uint64_t> EvenLooks(std::uint64_t total, int looks) {
  const std::uint64_t count = std::min<std::uint64_t>(total, static_cast<std::uint64_t>(looks));
  std::vector<std::uint64_t> scans;
  for (std::uint64_t i = 1; i <= count; ++i) {
    // i * total / count, rounded up, without the product's overflow.
    const std::uint64_t whole = total / count;
    const std::uint64_t rest = total % count;
    scans.push_back(i * whole + (i * rest + count - 1) / count);
  }
  return scans;
}

}  // namespace lastscan::rehearsal
