#include "engine/advice/verdict.h"

#include <algorithm>
#include <cmath>

#include "engine/advice/wording.h"
#include "engine/forecast/pace.h"

namespace lastscan::engine {
namespace {

// Chance of meeting the goal by the plan at which a run is on course, and the
// one below which a run that was on course no longer is (and the other way).
constexpr double kEvenChance = 0.5;
constexpr double kLeaveCourse = 0.2;
constexpr double kRejoinCourse = 0.8;
// A run out of reach comes back only when its chance has doubled.
constexpr double kReturnFactor = 2;

bool NeedsInspection(const std::vector<v1::Finding>& findings) {
  return std::any_of(findings.begin(), findings.end(),
                     [](const v1::Finding& finding) { return finding.severity() == v1::HIGH; });
}

// Signal-to-noise with limits: "12.3 (95 %: 11.1 to 13.5)".
std::string WithLimits(const v1::Interval& interval) {
  return Rounded(interval.estimate()) + " (95 %: " + Rounded(interval.lower()) + " to " +
         Rounded(interval.upper()) + ")";
}

std::string AfterScans(const v1::Advice& advice) {
  return "after " + Scans(static_cast<double>(advice.scans_done())) +
         (advice.scans_done() == 1 ? " scan" : " scans");
}

std::string Target(const v1::Advice& advice) {
  return "the target of " + Rounded(advice.goal().target());
}

std::string LineName(const v1::Advice& advice) {
  return "the line at " + Shift(advice.limiting_line().shift_ppm());
}

std::string ClockOf(const google::protobuf::Timestamp& time) {
  return ClockTime(static_cast<double>(time.seconds()));
}

std::string SoFar(const v1::Advice& advice) {
  if (advice.limiting_line().confirmed()) {
    return LineName(advice) + " reads " + WithLimits(advice.signal_to_noise()) + " " +
           AfterScans(advice);
  }
  return "no sure line yet " + AfterScans(advice) +
         ": the strongest that could still hide is below " +
         Rounded(advice.signal_to_noise().upper());
}

// No forecast is certain.
std::string ChanceInWords(double chance) {
  return chance > 0.999 ? "over 99.9 %" : Percent(chance);
}

std::string Capital(std::string text) {
  if (!text.empty() && text[0] >= 'a' && text[0] <= 'z')
    text[0] = static_cast<char>(text[0] - 'a' + 'A');
  return text;
}

std::string BookingEnd(const Case& facts, const Wording& wording) {
  if (!wording.limiting_event.empty()) return wording.limiting_event;
  return facts.has_booking ? "the booking's end" : "the longest extension that the settings allow";
}

std::string Until(const v1::Advice& advice) {
  if (!advice.finish_at().has_estimate()) return "";
  return ", about " + ClockOf(advice.finish_at().estimate());
}

std::string NeededScans(const v1::Advice& advice) {
  const v1::Interval& needed = advice.scans_needed();
  std::string text = Scans(needed.estimate()) + " scans (95 %: " + Scans(needed.lower()) + " to ";
  return text + (std::isinf(needed.upper()) ? "no upper limit yet" : Scans(needed.upper())) + ")";
}

// Signal-to-noise by the booking's end: of an unseen line, at most.
double AtBookingEnd(const Case& facts, const v1::Advice& advice) {
  const v1::Interval& now = advice.signal_to_noise();
  const double reading = advice.limiting_line().confirmed() ? now.estimate() : now.upper();
  return reading * std::sqrt(std::max(facts.booked / facts.scans, 1.0));
}

std::string WhatWouldHelp(const Case& facts, const v1::Advice& advice) {
  // Signal-to-noise goes as the concentration, scans as its inverse square.
  const double factor = advice.goal().target() / std::max(AtBookingEnd(facts, advice), 1e-6);
  const bool number = factor > 1.05 && factor < 1000;
  const std::string least = advice.limiting_line().confirmed() ? "about " : "at least ";
  std::string help = "What would help: ";
  help += number ? least + Rounded(factor) + " times the concentration, " : "more substance, ";
  if (advice.matched_gain() > 1.1) {
    help += "a broadening of " + Rounded(advice.matched_broadening_hz()) + " Hz (factor " +
            Rounded(advice.matched_gain()) + "), ";
  }
  return help + (number
                     ? "or a booking with " + least + Rounded(factor * factor) + " times the scans."
                     : "or a longer booking.");
}

}  // namespace

v1::Verdict Judge(const Case& facts, const std::vector<v1::Finding>& findings) {
  const Outlook& outlook = facts.outlook;
  // Met is met: what fails afterwards cannot take the scans away, and a reading
  // that wanders a little below the rule is no evidence against it.
  if (outlook.stop_rule_met || facts.previous == v1::ENOUGH) return v1::ENOUGH;
  if (NeedsInspection(findings)) return v1::INSPECT;
  const double hopeless = facts.previous == v1::OUT_OF_REACH
                              ? kReturnFactor * facts.out_of_reach_chance
                              : facts.out_of_reach_chance;
  if (outlook.chance_by_booking < hopeless) return v1::OUT_OF_REACH;
  if (!facts.confirmed) return v1::UNDECIDED;
  if (facts.planned <= 0) return v1::ON_COURSE;
  double course = kEvenChance;
  if (facts.previous == v1::ON_COURSE) course = kLeaveCourse;
  if (facts.previous == v1::EXTEND) course = kRejoinCourse;
  return outlook.chance_by_plan >= course ? v1::ON_COURSE : v1::EXTEND;
}

std::uint64_t ScansAdvised(v1::Verdict verdict, const Case& facts) {
  const std::uint64_t now = WholeCycles(facts.scans, facts.phase_cycle);
  double scans = facts.planned;
  switch (verdict) {
    case v1::ENOUGH:
    case v1::OUT_OF_REACH:
      return now;
    case v1::ON_COURSE:
    case v1::EXTEND:
      scans = std::max(facts.outlook.scans_to_threshold, facts.scans);
      if (verdict == v1::ON_COURSE && facts.planned > 0) scans = std::min(scans, facts.planned);
      break;
    default:
      break;  // the plan, until more is known
  }
  if (std::isfinite(facts.booked)) {
    // A whole cycle that no longer fits the booking is not advised.
    const double fits = std::floor(facts.booked / facts.phase_cycle) * facts.phase_cycle;
    if (scans > fits) return std::max(now, static_cast<std::uint64_t>(fits));
  }
  if (!(scans < 1e18)) return now;
  return std::max(now, WholeCycles(scans, facts.phase_cycle));
}

std::string Because(const Case& facts, const Wording& wording) {
  const v1::Advice& advice = *wording.advice;
  const std::string so_far = Capital(SoFar(advice));
  const bool ended = facts.final;
  switch (advice.verdict()) {
    case v1::ENOUGH: {
      std::string text = so_far + ", and the stop rule for " + Target(advice) + " is met";
      if (ended) return text + "; the run has ended.";
      text += ": stop at scan " + Scans(static_cast<double>(advice.scans_advised())) +
              ", the next whole phase cycle";
      if (advice.scans_saved() > 0) {
        text += "; that saves " + Scans(static_cast<double>(advice.scans_saved())) + " scans";
        if (advice.seconds_saved() > 0) text += ", " + Duration(advice.seconds_saved());
      }
      return text + ".";
    }
    case v1::ON_COURSE:
      return so_far + "; " + Target(advice) + " is expected at " + NeededScans(advice) +
             Until(advice) + (facts.planned > 0 ? ", within the plan." : ".");
    case v1::EXTEND: {
      std::string text = so_far + "; " + Target(advice) + " needs " + NeededScans(advice);
      if (facts.planned > 0) {
        text += ", the plan has " + Scans(facts.planned);
      }
      if (ended) return text + ". The run has ended short of its goal.";
      if (static_cast<double>(advice.scans_advised()) > facts.planned) {
        text += ": add " + Scans(static_cast<double>(advice.scans_advised()) - facts.planned) +
                " scans" + Until(advice);
      }
      text += ". Chance by " + BookingEnd(facts, wording) + ": " +
              ChanceInWords(advice.chance_by_booking_end()) + ".";
      return text;
    }
    case v1::OUT_OF_REACH: {
      const bool confirmed = advice.limiting_line().confirmed();
      return so_far + "; by " + BookingEnd(facts, wording) + ", at " + Scans(facts.booked) +
             " scans, it would reach " + (confirmed ? "about " : "at most ") +
             Rounded(AtBookingEnd(facts, advice)) + ", and the chance of " + Target(advice) +
             " is " + ChanceInWords(advice.chance_by_booking_end()) + ". " +
             WhatWouldHelp(facts, advice);
    }
    case v1::INSPECT: {
      std::string text = "Look at the instrument: ";
      for (const v1::Finding& finding : advice.findings()) {
        if (finding.severity() != v1::HIGH) continue;
        text += finding.detail() + ". ";
        break;
      }
      return text + so_far + ".";
    }
    default: {
      std::string text = so_far + "; " + Target(advice) + " is not yet certain either way";
      const double decided = facts.outlook.decided_by;
      if (decided > facts.scans && std::isfinite(decided)) {
        text += ", and will be by about scan " +
                Scans(static_cast<double>(WholeCycles(decided, facts.phase_cycle)));
      }
      return text + ".";
    }
  }
}

}  // namespace lastscan::engine
