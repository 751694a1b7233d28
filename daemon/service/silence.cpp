// Watches for spectrometers that have gone silent.
#include "service/silence.h"

#include <algorithm>

namespace lastscan::service {

double SilenceWatch::Median(const std::deque<double>& intervals_s) {
  if (intervals_s.empty()) return 0;
  std::vector<double> sorted(intervals_s.begin(), intervals_s.end());
  const auto upper = sorted.begin() + static_cast<std::ptrdiff_t>(sorted.size() / 2);
  std::nth_element(sorted.begin(), upper, sorted.end());
  if (sorted.size() % 2 == 1) return *upper;
  return (*std::max_element(sorted.begin(), upper) + *upper) / 2;
}

void SilenceWatch::Arrived(const std::string& run, double recorded_at, double now) {
  const auto [place, is_new] = runs_.try_emplace(run);
  Watched& watched = place->second;
  if (!is_new) {
    const double by_spectrometer = recorded_at - watched.recorded_at;
    watched.intervals_s.push_back(by_spectrometer > 0 ? by_spectrometer : now - watched.arrived);
    if (watched.intervals_s.size() > kMostIntervals) watched.intervals_s.pop_front();
    watched.expected_s = Median(watched.intervals_s);
  }
  watched.recorded_at = recorded_at;
  watched.arrived = now;
  watched.not_before = 0;
  watched.told = false;
}

void SilenceWatch::Resume(const std::string& run, const std::vector<double>& intervals_s,
                          double recorded_at, double now, bool told) {
  Watched& watched = runs_[run];
  watched.intervals_s.assign(intervals_s.begin(), intervals_s.end());
  watched.recorded_at = recorded_at;
  watched.arrived = now;
  watched.expected_s = Median(watched.intervals_s);
  watched.told = told;
}

void SilenceWatch::Forget(const std::string& run) { runs_.erase(run); }

std::vector<Silence> SilenceWatch::Due(double now) {
  std::vector<Silence> silences;
  for (auto& [run, watched] : runs_) {
    if (!watched.IsWaiting() || now < DueAt(watched)) continue;
    watched.told = true;
    silences.push_back({run, watched.expected_s, now - watched.arrived});
  }
  return silences;
}

void SilenceWatch::Postpone(const std::string& run, double again) {
  const auto found = runs_.find(run);
  if (found == runs_.end()) return;
  found->second.told = false;
  found->second.not_before = again;
}

double SilenceWatch::DueAt(const Watched& watched) const {
  return std::max(watched.arrived + after_ * watched.expected_s, watched.not_before);
}

std::optional<double> SilenceWatch::NextDue() const {
  std::optional<double> next;
  for (const auto& [run, watched] : runs_) {
    if (!watched.IsWaiting()) continue;
    next = next ? std::min(*next, DueAt(watched)) : DueAt(watched);
  }
  return next;
}

}  // namespace lastscan::service
