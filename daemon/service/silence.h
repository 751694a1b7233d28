// Watches for spectrometers that have gone silent: no snapshot for some times the
// interval at which they used to come.
#pragma once

#include <deque>
#include <map>
#include <optional>
#include <string>
#include <vector>

namespace lastscan::service {

// Intervals that a run's expected interval is the median of; older ones go.
inline constexpr std::size_t kMostIntervals = 64;

struct Silence {
  std::string run;
  double expected_s = 0;  // the usual interval
  double silent_s = 0;    // since the last snapshot arrived
};

// Times are seconds of any clock that never jumps, but `recorded_at`, which is
// the spectrometer's (Unix seconds).
class SilenceWatch {
 public:
  // A run is silent when nothing came for `after` times its expected interval.
  explicit SilenceWatch(double after) : after_(after) {}

  // A snapshot of `run` arrived. The spectrometer's own times say how far apart
  // snapshots are, for several may arrive at once after a pause; where they do
  // not advance, the times of arrival do.
  void Arrived(const std::string& run, double recorded_at, double now);

  // A run known from before a restart. Its sender gets the full time from now,
  // unless its silence was `told` already.
  // REQUIRES: the watch does not know the run.
  void Resume(const std::string& run, const std::vector<double>& intervals_s, double recorded_at,
              double now, bool told);

  // The run needs no watching any more (it ended, or its goal is met).
  void Forget(const std::string& run);

  // Runs silent at `now`. Each is told once, then not again until another
  // snapshot of it arrives.
  std::vector<Silence> Due(double now);

  // Due tells of the run again at `again`, unless a snapshot arrives before.
  void Postpone(const std::string& run, double again);

  // When Due will next have something to tell, if nothing arrives.
  std::optional<double> NextDue() const;

 private:
  struct Watched {
    std::deque<double> intervals_s;
    double recorded_at = 0;
    double arrived = 0;
    double expected_s = 0;  // 0: not known yet
    double not_before = 0;  // Due tells of it then or later
    bool told = false;

    bool IsWaiting() const { return !told && expected_s > 0; }
  };
  double DueAt(const Watched& watched) const;
  static double Median(const std::deque<double>& intervals_s);

  double after_;
  std::map<std::string, Watched> runs_;
};

}  // namespace lastscan::service
