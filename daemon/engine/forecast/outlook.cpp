#include "engine/forecast/outlook.h"

#include <algorithm>
#include <cmath>
#include <limits>

#include "engine/forecast/stop_boundary.h"

namespace lastscan::engine {
namespace {

constexpr double kNormal95 = 1.959963984540054;

double Chance(const Requirement& requirement, double threshold, double scans, double later) {
  if (std::isinf(later)) return 1;
  if (requirement.confirmed) {
    return ChanceOfReading(threshold, requirement.reading.estimate, requirement.reading.deviation,
                           scans, later);
  }
  return ChanceOfReading(threshold, requirement.posterior, scans, later);
}

}  // namespace

Outlook LookAhead(const Survey& survey, const OutlookQuestion& question) {
  Outlook outlook;
  const double limit = question.target * (1 - question.tolerance);
  // The margin is in units of the reading's own scatter.
  const double margin = StopMargins::Shared().At(limit, question.looks, 1 - question.assurance);
  const double infinite = std::numeric_limits<double>::infinity();

  outlook.stop_rule_met = true;
  // Readings of confirmed lines err independently; lines not seen yet are of one
  // sample and strong or weak together, so the weakest chance stands for them.
  double unseen_by_plan = 1;
  double unseen_by_booking = 1;
  outlook.chance_by_plan = 1;
  outlook.chance_by_booking = 1;
  double most_needed = -1;
  for (std::size_t i = 0; i < survey.requirements.size(); ++i) {
    const Requirement& requirement = survey.requirements[i];
    const Reading& reading = requirement.reading;
    const double threshold = std::max(question.target, limit + margin * reading.deviation);
    outlook.stop_rule_met =
        outlook.stop_rule_met && requirement.confirmed && reading.estimate >= threshold;
    const double by_plan =
        Chance(requirement, threshold, question.scans, std::min(question.planned, question.booked));
    const double by_booking = Chance(requirement, threshold, question.scans, question.booked);
    if (requirement.confirmed) {
      outlook.chance_by_plan *= by_plan;
      outlook.chance_by_booking *= by_booking;
    } else {
      unseen_by_plan = std::min(unseen_by_plan, by_plan);
      unseen_by_booking = std::min(unseen_by_booking, by_booking);
    }
    // An unconfirmed window needs more than any confirmed one; among several,
    // the one that could be strongest is no comfort, so the weakest limits.
    const double needed = requirement.confirmed
                              ? ScansForTarget(question.target, reading.estimate, question.scans)
                              : 1e100 / std::max(reading.upper, 1e-3);
    if (needed > most_needed) {
      most_needed = needed;
      outlook.limiting = i;
      outlook.threshold = threshold;
    }
  }

  outlook.chance_by_plan *= unseen_by_plan;
  outlook.chance_by_booking *= unseen_by_booking;

  const Requirement& limiting = survey.requirements[outlook.limiting];
  const Reading& reading = limiting.reading;
  outlook.scans_needed = ScansForTarget(question.target, reading.estimate, question.scans);
  outlook.scans_needed_lower = ScansForTarget(question.target, reading.upper, question.scans);
  outlook.scans_needed_upper = ScansForTarget(question.target, reading.lower, question.scans);
  outlook.scans_to_threshold =
      limiting.confirmed ? ScansForTarget(outlook.threshold, reading.estimate, question.scans)
                         : infinite;
  if (question.planned > 0) {
    outlook.at_plan =
        ReadingLater(reading.estimate, reading.deviation, question.scans, question.planned);
    const double half = kNormal95 * outlook.at_plan.deviation;
    outlook.at_plan_lower = std::max(outlook.at_plan.centre - half, 0.0);
    outlook.at_plan_upper = outlook.at_plan.centre + half;
    if (!limiting.confirmed) {
      outlook.at_plan.centre = 0;
      outlook.at_plan_lower = 0;
      outlook.at_plan_upper =
          reading.upper * std::sqrt(std::max(question.planned / question.scans, 1.0));
    }
  }
  if (!limiting.confirmed) {
    const double end = std::isinf(question.booked) ? question.planned : question.booked;
    outlook.decided_by =
        end * (reading.upper / question.target) * (reading.upper / question.target);
  }
  return outlook;
}

}  // namespace lastscan::engine
