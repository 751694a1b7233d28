// Advice for the tests of the drawings: an invented run that follows the
// root-of-scans law exactly, and the odd values that real ones may hold.
#pragma once

#include <cmath>
#include <cstdint>
#include <limits>
#include <string>
#include <vector>

#include "engine/advice/cautions.h"
#include "lastscan/v1/advice.pb.h"

namespace lastscan::test {

// After `scans` scans of a run whose limiting line has `per_root_scan` times the
// root of the scans; confirmed from a reading of 4 on.
inline v1::Advice LawfulAdvice(std::uint64_t scans, double per_root_scan = 0.4) {
  constexpr double kTarget = 10;
  constexpr std::uint64_t kPlanned = 1024;
  const double reading = per_root_scan * std::sqrt(static_cast<double>(scans));
  const bool confirmed = reading >= 4;
  v1::Advice advice;
  advice.set_run("night-7");
  advice.set_instrument("bench-1");
  advice.set_sample("resin B");
  advice.set_nucleus("13C");
  advice.mutable_issued_at()->set_seconds(1'800'000'000 + static_cast<std::int64_t>(scans) * 5 / 2);
  advice.set_scans_done(scans);
  advice.set_scans_planned(kPlanned);
  advice.set_scans_advised(632);
  advice.set_seconds_per_scan(2.5);
  advice.set_verdict(v1::ON_COURSE);
  advice.set_because("The weakest window will pass the goal before the plan ends.");
  advice.mutable_goal()->set_target(kTarget);
  advice.mutable_goal()->set_convention(v1::HEIGHT_OVER_RMS);
  v1::Interval* now = advice.mutable_signal_to_noise();
  now->set_upper(reading + 2);
  if (confirmed) {
    now->set_estimate(reading);
    now->set_lower(reading - 2);
  }
  advice.mutable_limiting_line()->set_confirmed(confirmed);
  advice.mutable_limiting_line()->set_shift_ppm(128.42);
  advice.mutable_limiting_line()->set_width_hz(3.2);
  v1::Interval* end = advice.mutable_at_planned_end();
  end->set_estimate(32 * per_root_scan);
  end->set_lower(end->estimate() - 2);
  end->set_upper(end->estimate() + 2);
  const double needed = std::pow(kTarget / per_root_scan, 2);
  advice.mutable_scans_needed()->set_estimate(needed);
  advice.mutable_scans_needed()->set_lower(0.7 * needed);
  advice.mutable_scans_needed()->set_upper(confirmed ? 1.6 * needed
                                                     : std::numeric_limits<double>::infinity());
  advice.mutable_finish_at()->mutable_estimate()->set_seconds(1'800'001'600);
  advice.set_chance_by_booking_end(0.97);
  for (std::string_view caution : engine::Cautions()) {
    advice.add_cautions(std::string(caution));
  }
  return advice;
}

inline std::vector<v1::Advice> LawfulHistory() {
  std::vector<v1::Advice> history;
  for (std::uint64_t scans = 32; scans <= 512; scans += 32) {
    history.push_back(LawfulAdvice(scans));
  }
  return history;
}

// Every number in it is not a number.
inline v1::Advice AdviceOfNoNumbers() {
  constexpr double kNone = std::numeric_limits<double>::quiet_NaN();
  v1::Advice advice = LawfulAdvice(128);
  for (v1::Interval* interval :
       {advice.mutable_signal_to_noise(), advice.mutable_at_planned_end(),
        advice.mutable_scans_needed(), advice.mutable_noise()->mutable_growth_exponent()}) {
    interval->set_estimate(kNone);
    interval->set_lower(kNone);
    interval->set_upper(kNone);
  }
  advice.mutable_limiting_line()->set_shift_ppm(kNone);
  advice.mutable_limiting_line()->set_width_hz(kNone);
  advice.mutable_goal()->set_target(kNone);
  advice.set_chance_by_booking_end(kNone);
  advice.set_seconds_per_scan(kNone);
  advice.set_seconds_saved(kNone);
  advice.set_scans_saved(8);
  advice.set_matched_gain(kNone);
  advice.set_matched_broadening_hz(kNone);
  for (int i = 0; i < 2; ++i) {
    v1::Line* line = advice.add_lines();
    line->set_shift_ppm(kNone);
    line->set_confirmed(i == 0);
    line->mutable_signal_to_noise()->set_estimate(kNone);
    line->mutable_signal_to_noise()->set_upper(kNone);
  }
  return advice;
}

inline std::vector<v1::Verdict> AllVerdicts() {
  return {v1::UNDECIDED, v1::ON_COURSE, v1::ENOUGH, v1::EXTEND, v1::OUT_OF_REACH, v1::INSPECT};
}

inline std::vector<std::string> LinesOf(const std::string& text) {
  std::vector<std::string> lines;
  for (std::size_t begin = 0; begin < text.size();) {
    const std::size_t end = std::min(text.find('\n', begin), text.size());
    lines.push_back(text.substr(begin, end - begin));
    begin = end + 1;
  }
  return lines;
}

}  // namespace lastscan::test
