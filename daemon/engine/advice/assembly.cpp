#include "engine/advice/assembly.h"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "engine/advice/cautions.h"
#include "engine/advice/wording.h"
#include "engine/forecast/pace.h"

namespace lastscan::engine {
namespace {

constexpr std::size_t kMostLines = 64;          // listed in an advice, strongest first
constexpr double kLastSecond = 253402300799.0;  // the end of the year 9999

v1::Interval Scaled(double estimate, double lower, double upper, double factor) {
  v1::Interval interval;
  interval.set_estimate(estimate * factor);
  interval.set_lower(lower * factor);
  interval.set_upper(upper * factor);
  return interval;
}

// The moment at which `scans` whole-cycle scans will be done; nothing when that
// is not known, or never.
void SetMoment(const Matter& matter, double scans, google::protobuf::Timestamp* time) {
  const auto& recorded = matter.snapshot->recorded_at();
  const double more = std::max(scans - matter.facts.scans, 0.0);
  const double seconds = static_cast<double>(recorded.seconds()) + more * matter.seconds_per_scan;
  if (!(seconds < kLastSecond)) return;
  time->set_seconds(static_cast<std::int64_t>(std::ceil(seconds)));
}

void SetFinish(const Matter& matter, v1::Advice& advice) {
  if (matter.seconds_per_scan <= 0) return;
  v1::TimeInterval& finish = *advice.mutable_finish_at();
  const auto set = [&](double scans, google::protobuf::Timestamp* (v1::TimeInterval::*field)(),
                       void (v1::TimeInterval::*clear)()) {
    google::protobuf::Timestamp* time = (finish.*field)();
    SetMoment(
        matter,
        scans < 1e15 ? static_cast<double>(WholeCycles(scans, matter.facts.phase_cycle)) : scans,
        time);
    if (time->seconds() == 0) (finish.*clear)();
  };
  const bool enough = advice.verdict() == v1::ENOUGH;
  const double stop = static_cast<double>(advice.scans_advised());
  const v1::Interval& needed = advice.scans_needed();
  set(enough ? stop : needed.estimate(), &v1::TimeInterval::mutable_estimate,
      &v1::TimeInterval::clear_estimate);
  set(enough ? stop : needed.lower(), &v1::TimeInterval::mutable_lower,
      &v1::TimeInterval::clear_lower);
  set(enough ? stop : needed.upper(), &v1::TimeInterval::mutable_upper,
      &v1::TimeInterval::clear_upper);
}

void SetLines(const Matter& matter, v1::Advice& advice) {
  for (const SurveyedLine& line : matter.survey->lines) {
    if (advice.lines_size() == static_cast<int>(kMostLines)) break;
    v1::Line& listed = *advice.add_lines();
    listed.set_shift_ppm(matter.axis->PpmAt(line.line.bin));
    listed.set_width_hz(line.line.width_hz);
    listed.set_confirmed(true);
    listed.set_window(line.window);
    *listed.mutable_signal_to_noise() =
        Scaled(line.reading.estimate, line.reading.lower, line.reading.upper, matter.factor);
  }
}

void SetLimiting(const Matter& matter, const Requirement& limiting, v1::Advice& advice) {
  *advice.mutable_signal_to_noise() = Scaled(limiting.reading.estimate, limiting.reading.lower,
                                             limiting.reading.upper, matter.factor);
  v1::LimitingLine& line = *advice.mutable_limiting_line();
  line.set_confirmed(limiting.confirmed);
  advice.set_matched_gain(1);
  if (limiting.line) {
    line.set_shift_ppm(matter.axis->PpmAt(limiting.line->bin));
    line.set_width_hz(limiting.line->width_hz);
  } else if (limiting.window >= 0) {
    const auto& window = matter.goal->windows(limiting.window);
    line.set_shift_ppm(0.5 * (window.low_ppm() + window.high_ppm()));
  }
  if (limiting.confirmed && limiting.line && matter.acquisition_seconds > 0) {
    const double broadening = matter.goal->broadening_hz();
    const double resolution = 1 / matter.acquisition_seconds;
    const double natural = std::max(limiting.line->width_hz - broadening, 0.1 * resolution);
    const MatchedBroadening matched = Matched(natural, broadening, matter.acquisition_seconds);
    advice.set_matched_broadening_hz(matched.hz);
    advice.set_matched_gain(matched.gain);
  }
}

}  // namespace

MatchedBroadening Matched(double width_hz, double broadening_hz, double acquisition_seconds) {
  // Height goes as the integral of exp(-pi (w + b) t), noise as the root of the
  // integral of exp(-2 pi b t), both over the FID.
  const auto ratio = [&](double b) {
    const double height_rate = std::numbers::pi * (width_hz + b);
    const double noise_rate = 2 * std::numbers::pi * b;
    const double height = -std::expm1(-height_rate * acquisition_seconds) / height_rate;
    const double noise = noise_rate == 0
                             ? acquisition_seconds
                             : -std::expm1(-noise_rate * acquisition_seconds) / noise_rate;
    return height / std::sqrt(noise);
  };
  return {width_hz, std::max(1.0, ratio(width_hz) / ratio(broadening_hz))};
}

v1::Advice Assemble(Matter& matter) {
  const v1::Snapshot& snapshot = *matter.snapshot;
  Case& facts = matter.facts;
  const Outlook& outlook = facts.outlook;
  const Requirement& limiting = matter.survey->requirements[outlook.limiting];
  facts.confirmed =
      std::all_of(matter.survey->requirements.begin(), matter.survey->requirements.end(),
                  [](const Requirement& each) { return each.confirmed; });

  v1::Advice advice;
  advice.set_run(snapshot.run());
  advice.set_instrument(snapshot.instrument());
  advice.set_sample(snapshot.sample());
  advice.set_nucleus(snapshot.nucleus());
  *advice.mutable_issued_at() = snapshot.recorded_at();
  advice.set_scans_done(snapshot.scans_done());
  advice.set_scans_planned(snapshot.scans_planned());
  advice.set_seconds_per_scan(matter.seconds_per_scan);
  *advice.mutable_goal() = *matter.goal;
  SetLimiting(matter, limiting, advice);
  SetLines(matter, advice);
  *advice.mutable_at_planned_end() =
      Scaled(outlook.at_plan.centre, outlook.at_plan_lower, outlook.at_plan_upper, matter.factor);
  *advice.mutable_scans_needed() =
      Scaled(outlook.scans_needed, outlook.scans_needed_lower, outlook.scans_needed_upper, 1);
  advice.set_chance_by_booking_end(outlook.chance_by_booking);
  advice.mutable_noise()->set_per_scan(matter.noise_per_scan);
  *advice.mutable_noise()->mutable_growth_exponent() = matter.noise_growth;
  advice.mutable_noise()->set_window_excess(matter.window_excess);
  for (v1::Finding& finding : matter.findings) *advice.add_findings() = finding;
  for (std::string_view caution : Cautions()) advice.add_cautions(std::string(caution));

  advice.set_verdict(Judge(facts, matter.findings));
  advice.set_scans_advised(ScansAdvised(advice.verdict(), facts));
  if (snapshot.scans_planned() > advice.scans_advised()) {
    advice.set_scans_saved(snapshot.scans_planned() - advice.scans_advised());
    advice.set_seconds_saved(static_cast<double>(advice.scans_saved()) * matter.seconds_per_scan);
  }
  SetFinish(matter, advice);
  Wording wording;
  wording.advice = &advice;
  wording.limiting_event = matter.limiting_event;
  advice.set_because(Because(facts, wording));
  return advice;
}

}  // namespace lastscan::engine
