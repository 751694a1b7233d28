// Ranges, ticks and marks of the progress figure.
#include "drawing/progress_layout.h"

#include <algorithm>
#include <cmath>

#include "drawing/words.h"

namespace lastscan::drawing {
namespace {

bool Drawable(double value) { return std::isfinite(value) && value >= 0 && value < 1e15; }

std::optional<Reading> ReadingOf(const v1::Advice& advice) {
  const v1::Interval& interval = advice.signal_to_noise();
  Reading reading{static_cast<double>(advice.scans_done()), interval.estimate(), interval.lower(),
                  interval.upper(), advice.limiting_line().confirmed()};
  if (advice.scans_done() == 0) {
    return std::nullopt;
  }
  if (!reading.confirmed) {
    reading.estimate = reading.lower = 0;
    return Drawable(reading.upper) ? std::optional(reading) : std::nullopt;
  }
  if (!Drawable(reading.estimate)) {
    return std::nullopt;
  }
  // A limit that cannot be drawn gives way to the estimate.
  reading.lower = Drawable(reading.lower) ? reading.lower : reading.estimate;
  reading.upper = Drawable(reading.upper) ? reading.upper : reading.estimate;
  return reading;
}

// The smallest of 1, 2, 4, 5, 8 times a power of ten (`fine`), or of 1, 2, 5,
// that is at least `value`.
double NiceStep(double value, bool fine) {
  const double decade = std::pow(10, std::floor(std::log10(value)));
  for (double factor : {1.0, 2.0, 4.0, 5.0, 8.0, 10.0}) {
    if (!fine && (factor == 4.0 || factor == 8.0)) {
      continue;
    }
    if (factor * decade >= value * (1 - 1e-9)) {
      return factor * decade;
    }
  }
  return 10 * decade;
}

}  // namespace

double ProgressLayout::Across(double scans) const { return std::sqrt(scans / most_scans); }

ProgressLayout LayOut(const ProgressFigure& figure) {
  ProgressLayout layout;
  for (const v1::Advice& advice : figure.history) {
    if (const std::optional<Reading> reading = ReadingOf(advice)) {
      layout.readings.push_back(*reading);
      layout.most_signal = std::max(layout.most_signal, reading->upper);
    }
  }
  if (!layout.readings.empty() && layout.readings.back().confirmed) {
    layout.law = layout.readings.back();
  }
  const v1::Advice none;
  const v1::Advice& latest = figure.history.empty() ? none : figure.history.back();
  const auto done = static_cast<double>(latest.scans_done());
  const auto planned = static_cast<double>(latest.scans_planned());
  const auto advised = static_cast<double>(latest.scans_advised());
  double most = std::max({1.0, done, planned, advised});
  // A booking far beyond everything else would press the run into a corner.
  const double booking = figure.scans_at_booking_end.value_or(0);
  const bool booking_fits = Drawable(booking) && booking > 0 && booking <= 3 * most;
  most = booking_fits ? std::max(most, booking) : most;
  layout.most_scans = 1.06 * most;

  if (Drawable(latest.goal().target()) && latest.goal().target() > 0) {
    layout.goal = latest.goal().target();
  }
  const double tallest = std::max(layout.most_signal, layout.goal.value_or(0));
  layout.most_signal = std::max(tallest, layout.goal.value_or(0));
  if (layout.law && done > 0) {
    // The forecast may grow out of the figure rather than press the rest down.
    const double ahead = layout.law->estimate * std::sqrt(layout.most_scans / done);
    layout.most_signal = std::max(layout.most_signal, std::min(ahead, 2 * tallest));
  }
  if (planned > done && latest.limiting_line().confirmed() &&
      Drawable(latest.at_planned_end().estimate()) && latest.at_planned_end().estimate() > 0) {
    const v1::Interval& end = latest.at_planned_end();
    layout.planned_end =
        Reading{planned, end.estimate(), Drawable(end.lower()) ? end.lower() : end.estimate(),
                Drawable(end.upper()) ? end.upper() : end.estimate(), true};
    layout.most_signal = std::max(layout.most_signal, std::min(end.estimate(), 2 * tallest));
  }
  layout.most_signal *= 1.1;

  if (advised > 0) {
    layout.events.push_back({'S', "stop " + Scans(advised), advised});
  }
  if (planned > 0) {
    layout.events.push_back({'P', "plan " + Scans(planned), planned});
  }
  if (booking_fits) {
    layout.events.push_back({'B', "booking ends " + Scans(booking), booking});
  }
  std::stable_sort(layout.events.begin(), layout.events.end(),
                   [](const Event& a, const Event& b) { return a.scans < b.scans; });

  // Ticks at the squares of even steps stand at even distances.
  const double root = std::sqrt(layout.most_scans);
  const double step = std::max(1.0, NiceStep(root / 6, true));
  for (double at = 0; at <= root * (1 - 1e-9); at += step) {
    layout.scan_ticks.push_back(static_cast<std::uint64_t>(std::llround(at * at)));
  }
  const double rise = NiceStep(layout.most_signal / 6, false);
  for (double at = 0; at <= layout.most_signal; at += rise) {
    layout.signal_ticks.push_back(at);
  }
  return layout;
}

std::string DescribeInWords(const ProgressFigure& figure) {
  if (figure.history.empty()) {
    return "No snapshot yet.";
  }
  const v1::Advice& latest = figure.history.back();
  std::string text = "Signal-to-noise against the number of scans, on a root axis. After " +
                     std::to_string(latest.scans_done()) + " scans: " + ReadingInWords(latest) +
                     ".";
  if (latest.goal().target() > 0) {
    text += " The goal is " + Brief(latest.goal().target()) + ".";
  }
  for (const Event& event : LayOut(figure).events) {
    text += event.letter == 'S'   ? " Advised stop at scan "
            : event.letter == 'P' ? " The plan ends at scan "
                                  : " The booking ends at scan ";
    text += Scans(event.scans) + ".";
  }
  return text;
}

}  // namespace lastscan::drawing
