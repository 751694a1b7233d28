// The verdict, from the outlook and the findings, and the sentence that says why.
// Add one: advice.proto (Verdict), a rule in Judge, its words in Because.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "engine/forecast/outlook.h"
#include "lastscan/v1/advice.pb.h"

namespace lastscan::engine {

struct Case {
  v1::Verdict previous = v1::VERDICT_UNSPECIFIED;
  Outlook outlook;
  bool confirmed = false;  // every requirement
  double scans = 0;
  double planned = 0;        // 0: not known
  double booked = 0;         // scans by the booking's end, may be infinite
  bool has_booking = false;  // a booking's end or a site event sets `booked`
  std::uint32_t phase_cycle = 1;
  double out_of_reach_chance = 0.05;
  bool final = false;
};

// A verdict once given stays until evidence turns against it: each boundary has
// one value to cross and a harder one to cross back.
v1::Verdict Judge(const Case& facts, const std::vector<v1::Finding>& findings);

// What the sentence needs besides the case.
struct Wording {
  v1::Advice* advice = nullptr;  // filled in but for `because`
  std::string limiting_event;    // site event that ends the booking, if one does
};

std::string Because(const Case& facts, const Wording& wording);

// The total number of scans we recommend, in whole phase cycles.
std::uint64_t ScansAdvised(v1::Verdict verdict, const Case& facts);

}  // namespace lastscan::engine
