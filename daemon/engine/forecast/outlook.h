// Where a run is heading: every requirement of its goal carried forward by the
// root-of-scans law, against the plan and the booking.
#pragma once

#include <cstdint>

#include "engine/forecast/extrapolation.h"
#include "engine/sensitivity/survey.h"

namespace lastscan::engine {

struct OutlookQuestion {
  double scans = 0;
  double planned = 0;  // 0: not known
  double booked = 0;   // scans possible by the booking's end; infinite: open
  double target = 0;   // height over rms, as the survey's readings
  double tolerance = 0.1;
  double assurance = 0.95;
  double looks = 1;  // as if evenly spaced, see StopMargins
};

struct Outlook {
  std::size_t limiting = 0;       // index of the requirement that needs most scans
  bool stop_rule_met = false;     // by every requirement
  double threshold = 0;           // reading of the limiting line that meets it
  double scans_needed = 0;        // until the true value reaches the target; may
  double scans_needed_lower = 0;  // be infinite, as may the upper limit
  double scans_needed_upper = 0;
  double scans_to_threshold = 0;  // at which the reading is expected to meet the rule
  Spread at_plan;                 // predicted reading of the limiting line
  double at_plan_lower = 0;
  double at_plan_upper = 0;
  double chance_by_plan = 0;  // that every requirement meets the rule by then
  double chance_by_booking = 0;
  double decided_by = 0;  // unconfirmed: scans at which a blank would be
                          // known to be out of reach; 0: already confirmed
};

// REQUIRES: survey.requirements not empty, scans and target > 0.
Outlook LookAhead(const Survey& survey, const OutlookQuestion& question);

}  // namespace lastscan::engine
