// The wording of numbers, times, verdicts and findings.
#include "drawing/words.h"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <ctime>
#include <system_error>

namespace lastscan::drawing {
namespace {

constexpr std::string_view kNotKnown = "not known";
constexpr std::string_view kUnlimited = "unlimited";

// Not printf: its decimal sign would follow the program's locale.
std::string Printed(double value, std::chars_format form, int precision) {
  std::array<char, 400> text{};
  const auto [end, error] =
      std::to_chars(text.data(), text.data() + text.size(), value, form, precision);
  return error == std::errc{} ? std::string(text.data(), end) : std::string(kNotKnown);
}

std::string Fixed(double value, int digits) {
  return Printed(value, std::chars_format::fixed, digits);
}

std::string Significant(double value) { return Printed(value, std::chars_format::general, 2); }

std::string Between(const v1::Interval& interval, std::string (*write)(double)) {
  const auto [estimate, lower, upper] =
      std::array{interval.estimate(), interval.lower(), interval.upper()};
  if (std::isnan(estimate)) {
    return std::string(kNotKnown);
  }
  const bool has_lower = std::isfinite(lower);
  const bool has_upper = std::isfinite(upper);
  std::string text = write(estimate);
  if (has_lower && has_upper) {
    text += " (" + write(lower) + " to " + write(upper) + ")";
  } else if (has_lower) {
    text += " (" + write(lower) + " or more)";
  } else if (has_upper) {
    text += " (" + write(upper) + " or less)";
  }
  return text;
}

bool LocalTime(const google::protobuf::Timestamp& time, std::tm* local) {
  // The range of a protobuf timestamp: years 1 to 9999.
  constexpr std::int64_t kFirst = -62135596800;
  constexpr std::int64_t kLast = 253402300799;
  if (time.seconds() < kFirst || time.seconds() > kLast) {
    return false;
  }
  const std::time_t seconds = time.seconds();
  return localtime_r(&seconds, local) != nullptr;
}

}  // namespace

std::string Number(double value) {
  if (std::isnan(value)) {
    return std::string(kNotKnown);
  }
  if (std::isinf(value)) {
    return std::string(kUnlimited);
  }
  const double size = std::abs(value);
  if (size >= 1e9) {
    return Significant(value);
  }
  if (size >= 99.95 || size == 0) {
    return Fixed(value, 0);
  }
  return size >= 0.995 ? Fixed(value, 1) : Significant(value);
}

std::string Brief(double value) {
  std::string text = Number(value);
  if (text.ends_with(".0")) {
    text.resize(text.size() - 2);
  }
  return text;
}

std::string Chance(double chance) {
  if (std::isnan(chance)) {
    return {};
  }
  if (chance > 0.99) {
    return "over 99 %";
  }
  return chance < 0.01 ? "under 1 %" : Fixed(100 * chance, 0) + " %";
}

std::string Shift(double ppm) {
  return std::isfinite(ppm) && std::abs(ppm) < 1e6 ? Fixed(ppm, 2) + " ppm" : Number(ppm);
}

std::string Scans(double value) {
  if (!std::isfinite(value)) {
    return Number(value);
  }
  if (value >= 1e15) {
    return Significant(value);
  }
  return Fixed(std::max(0.0, std::ceil(value - 1e-9)), 0);
}

std::string WithLimits(const v1::Interval& interval) { return Between(interval, Number); }
std::string ExponentWithLimits(const v1::Interval& interval) {
  return Between(interval, [](double value) { return Fixed(value, 2); });
}
std::string ScansWithLimits(const v1::Interval& interval) { return Between(interval, Scans); }

std::string ReadingInWords(const v1::Advice& advice) {
  const v1::Interval& reading = advice.signal_to_noise();
  if (advice.limiting_line().confirmed()) {
    return WithLimits(reading);
  }
  if (std::isfinite(reading.upper()) && reading.upper() > 0) {
    return "below " + Number(reading.upper()) + " so far";
  }
  return "no line seen so far";
}

std::string DurationInWords(double seconds) {
  if (!std::isfinite(seconds) || seconds > 1e12) {
    return std::string(std::isnan(seconds) ? kNotKnown : kUnlimited);
  }
  auto left = static_cast<std::int64_t>(std::llround(std::max(0.0, seconds)));
  struct Unit {
    std::int64_t seconds;
    const char* name;
  };
  constexpr std::array<Unit, 4> kUnits = {{{86400, " d"}, {3600, " h"}, {60, " min"}, {1, " s"}}};
  std::string text;
  for (std::size_t i = 0; i < kUnits.size(); ++i) {
    const std::int64_t count = left / kUnits[i].seconds;
    if (count == 0 && i + 1 < kUnits.size()) {
      continue;
    }
    text = std::to_string(count) + kUnits[i].name;
    left -= count * kUnits[i].seconds;
    if (i + 1 < kUnits.size()) {
      const std::int64_t rest = left / kUnits[i + 1].seconds;
      if (rest > 0) {
        text += " " + std::to_string(rest) + kUnits[i + 1].name;
      }
    }
    break;
  }
  return text;
}

std::string ClockTime(const google::protobuf::Timestamp& time,
                      const google::protobuf::Timestamp& seen_from) {
  std::tm local{};
  std::tm from{};
  if (!LocalTime(time, &local) || !LocalTime(seen_from, &from)) {
    return {};
  }
  const bool same_year = local.tm_year == from.tm_year;
  const bool same_day = same_year && local.tm_yday == from.tm_yday;
  const char* format = same_day ? "%H:%M" : same_year ? "%e %b %H:%M" : "%e %b %Y %H:%M";
  std::array<char, 64> text{};
  std::strftime(text.data(), text.size(), format, &local);
  const std::string_view said(text.data());
  return std::string(said.substr(said.front() == ' ' ? 1 : 0));
}

std::string ClockTimes(const v1::TimeInterval& times,
                       const google::protobuf::Timestamp& seen_from) {
  if (!times.has_estimate()) {
    return {};
  }
  std::string text = ClockTime(times.estimate(), seen_from);
  const std::string lower = times.has_lower() ? ClockTime(times.lower(), seen_from) : "";
  const std::string upper = times.has_upper() ? ClockTime(times.upper(), seen_from) : "";
  if (text.empty() || (lower.empty() && upper.empty())) {
    return text;
  }
  if (upper.empty()) {
    return text + " (" + lower + " or later)";
  }
  if (lower.empty()) {
    return text + " (" + upper + " or earlier)";
  }
  return text + " (" + lower + " to " + upper + ")";
}

std::string_view VerdictInWords(v1::Verdict verdict) {
  switch (verdict) {
    case v1::UNDECIDED:
      return "undecided";
    case v1::ON_COURSE:
      return "on course";
    case v1::ENOUGH:
      return "enough";
    case v1::EXTEND:
      return "extend";
    case v1::OUT_OF_REACH:
      return "out of reach";
    case v1::INSPECT:
      return "inspect";
    default:
      return "no verdict";
  }
}

std::string WhatToDo(const v1::Advice& advice) {
  const std::uint64_t done = advice.scans_done();
  const std::uint64_t planned = advice.scans_planned();
  const std::uint64_t advised = advice.scans_advised();
  const std::string at = std::to_string(advised);
  switch (advice.verdict()) {
    case v1::UNDECIDED:
      return "Too early to say: let it run.";
    case v1::ON_COURSE:
      return advised > 0 ? "Let it run: scan " + at + " should be the last one needed."
                         : "Let it run as planned.";
    case v1::ENOUGH:
      return advised > done ? "You may stop at scan " + at + ", the end of the phase cycle."
                            : "You may stop now.";
    case v1::EXTEND:
      return advised > planned && planned > 0 ? "Add " + std::to_string(advised - planned) +
                                                    " scans to the plan: " + at + " in all."
                                              : "The plan is too short for the goal: add scans.";
    case v1::OUT_OF_REACH:
      return "The goal will not be met in the time there is.";
    case v1::INSPECT:
      return "Look at the instrument before you spend more scans.";
    default:
      return "No advice yet.";
  }
}

std::string_view ConventionInWords(v1::Convention convention) {
  switch (convention) {
    case v1::HEIGHT_OVER_TWICE_RMS:
      return "height over twice the rms noise";
    case v1::PEAK_TO_PEAK:
      return "2.5 times height over peak-to-peak noise";
    default:
      return "height over rms noise";
  }
}

std::string_view FindingInWords(v1::FindingKind kind) {
  switch (kind) {
    case v1::AMPLITUDE_LOSS:
      return "signal is getting weaker";
    case v1::SHIFT_DRIFT:
      return "lines are moving";
    case v1::BROADENING:
      return "lines are getting wider";
    case v1::COHERENT_SPUR:
      return "interference that scans do not average away";
    case v1::NOISE_STEP:
      return "noise has changed";
    case v1::GAIN_CHANGE:
      return "receiver gain has changed";
    case v1::LOCK_LOSS:
      return "field lock is lost";
    case v1::SILENT:
      return "no new data from the spectrometer";
    case v1::NOISE_STRUCTURE:
      return "noise window holds more than noise";
    case v1::SINGLE_SNAPSHOT_NOISE:
      return "noise read from a single snapshot";
    case v1::UNKNOWN_TIME_PER_SCAN:
      return "time per scan is not known yet";
    default:
      return "something unusual";
  }
}

std::string_view SeverityInWords(v1::Severity severity) {
  switch (severity) {
    case v1::HIGH:
      return "look now";
    case v1::WARNING:
      return "warning";
    default:
      return "note";
  }
}

int Urgency(v1::Verdict verdict) {
  switch (verdict) {
    case v1::INSPECT:
      return 0;
    case v1::OUT_OF_REACH:
      return 1;
    case v1::ENOUGH:
      return 2;
    case v1::EXTEND:
      return 3;
    case v1::UNDECIDED:
      return 4;
    case v1::ON_COURSE:
      return 5;
    default:
      return 6;
  }
}

}  // namespace lastscan::drawing
