// Where a run is heading: the stop rule, the requirement that limits, and the
// chances of all of them together.
#include "engine/forecast/outlook.h"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>

#include "engine/forecast/stop_boundary.h"

namespace lastscan::engine {
namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

Requirement Seen(double z, double noise_deviation = 0) {
  Requirement requirement;
  requirement.confirmed = true;
  requirement.reading = ReadingOf(z, 1, noise_deviation);
  requirement.posterior = AmplitudePosterior::OfLine(z, 1, requirement.reading.deviation);
  return requirement;
}

Requirement Unseen(std::vector<float> readings) {
  Requirement requirement;
  requirement.posterior = AmplitudePosterior::OfUnseen(readings, 2);
  requirement.reading.upper = requirement.posterior.Quantile(0.975);
  return requirement;
}

Survey Of(std::vector<Requirement> requirements) {
  Survey survey;
  survey.requirements = std::move(requirements);
  return survey;
}

OutlookQuestion Question(double target = 10) {
  OutlookQuestion question;
  question.scans = 256;
  question.planned = 1024;
  question.booked = 2048;
  question.target = target;
  question.looks = 16;
  return question;
}

// The reading that the stop rule asks for: at the target, and so far above nine tenths of it.
double Threshold(const OutlookQuestion& question, double deviation = 1) {
  const double limit = question.target * (1 - question.tolerance);
  return std::max(
      question.target,
      limit + deviation * StopMargins::Shared().At(limit, question.looks, 1 - question.assurance));
}

double ReadAs(double estimate) { return std::sqrt(estimate * estimate + 1); }

TEST(Outlook, TheStopRuleIsMetAtItsThresholdAndNotBefore) {
  // A low target is ruled by the margin, a high one by the target itself.
  for (const double target : {5.0, 10.0, 40.0}) {
    const OutlookQuestion question = Question(target);
    const double threshold = Threshold(question);
    EXPECT_FALSE(LookAhead(Of({Seen(ReadAs(threshold - 0.01))}), question).stop_rule_met);
    EXPECT_TRUE(LookAhead(Of({Seen(ReadAs(threshold + 0.01))}), question).stop_rule_met);
    EXPECT_DOUBLE_EQ(LookAhead(Of({Seen(ReadAs(target))}), question).threshold, threshold);
  }
  EXPECT_GT(Threshold(Question(5)), 5);
  EXPECT_EQ(Threshold(Question(40)), 40);
}

TEST(Outlook, MoreLooksAndLessSureNoiseAskForMore) {
  OutlookQuestion question = Question(5);
  const double few = LookAhead(Of({Seen(4)}), question).threshold;
  question.looks = 1024;
  EXPECT_GT(LookAhead(Of({Seen(4)}), question).threshold, few);
  question = Question(40);
  const Requirement unsure = Seen(41, 0.1);
  const double deviation = unsure.reading.deviation;
  EXPECT_DOUBLE_EQ(LookAhead(Of({unsure}), question).threshold, Threshold(question, deviation));
  EXPECT_FALSE(LookAhead(Of({unsure}), question).stop_rule_met);
}

TEST(Outlook, AnUnconfirmedRequirementNeverMeetsTheRule) {
  const Outlook outlook = LookAhead(Of({Seen(100), Unseen({1, 2, 30})}), Question());
  EXPECT_FALSE(outlook.stop_rule_met);
  EXPECT_EQ(outlook.limiting, 1u);
  EXPECT_TRUE(std::isinf(outlook.scans_needed_upper));
  EXPECT_TRUE(std::isinf(outlook.scans_to_threshold));
  EXPECT_EQ(outlook.at_plan.centre, 0);
}

TEST(Outlook, TheWeakestLimitsAndAllMustBeMet) {
  const Outlook outlook = LookAhead(Of({Seen(30), Seen(7), Seen(12)}), Question());
  EXPECT_EQ(outlook.limiting, 1u);
  EXPECT_FALSE(outlook.stop_rule_met);
  EXPECT_TRUE(LookAhead(Of({Seen(30), Seen(17), Seen(12)}), Question()).stop_rule_met);
  // Of two that are not seen, the one that can hide least.
  EXPECT_EQ(LookAhead(Of({Unseen({1, 4.0F}), Unseen({1, 2.0F})}), Question()).limiting, 1u);
}

TEST(Outlook, ScansNeededGoAsTheSquareWithTheLimitsOfTheReading) {
  const Requirement seen = Seen(7);
  const Outlook outlook = LookAhead(Of({seen}), Question(14));
  const auto scans = [&](double reading) { return 256 * std::pow(14 / reading, 2); };
  EXPECT_NEAR(outlook.scans_needed, scans(seen.reading.estimate), 1e-6);
  EXPECT_NEAR(outlook.scans_needed_lower, scans(seen.reading.upper), 1e-6);
  EXPECT_NEAR(outlook.scans_needed_upper, scans(seen.reading.lower), 1e-6);
  // Four times the scans: twice the reading, and 1.96 roots of 3 on either side.
  EXPECT_NEAR(outlook.at_plan.centre, 2 * seen.reading.estimate, 1e-9);
  EXPECT_NEAR(outlook.at_plan_upper - outlook.at_plan.centre, 1.959964 * std::sqrt(3), 1e-4);
}

TEST(Outlook, ChancesOfLinesThatAreSeenMultiply) {
  const double one = LookAhead(Of({Seen(5)}), Question()).chance_by_plan;
  const double other = LookAhead(Of({Seen(5.5)}), Question()).chance_by_plan;
  const Outlook both = LookAhead(Of({Seen(5), Seen(5.5)}), Question());
  EXPECT_GT(one, 0.1);
  EXPECT_LT(other, 0.9);
  EXPECT_NEAR(both.chance_by_plan, one * other, 1e-12);
  const double by_booking = LookAhead(Of({Seen(5)}), Question()).chance_by_booking *
                            LookAhead(Of({Seen(5.5)}), Question()).chance_by_booking;
  EXPECT_NEAR(both.chance_by_booking, by_booking, 1e-12);
  // Of those not seen the least likely stands for all.
  const double strong = LookAhead(Of({Unseen({1, 4.0F})}), Question()).chance_by_booking;
  const double weak = LookAhead(Of({Unseen({1, 2.5F})}), Question()).chance_by_booking;
  EXPECT_NEAR(LookAhead(Of({Unseen({1, 4.0F}), Unseen({1, 2.5F})}), Question()).chance_by_booking,
              std::min(strong, weak), 1e-12);
}

TEST(Outlook, AnOpenBookingHoldsAnyGoal) {
  OutlookQuestion question = Question(1000);
  question.booked = kInfinity;
  EXPECT_EQ(LookAhead(Of({Seen(5)}), question).chance_by_booking, 1);
  EXPECT_EQ(LookAhead(Of({Unseen({1, 2})}), question).chance_by_booking, 1);
}

TEST(Outlook, APlanBeyondTheBookingHasTheBookingsChance) {
  OutlookQuestion question = Question();
  question.booked = 512;
  const Outlook outlook = LookAhead(Of({Seen(6)}), question);
  EXPECT_EQ(outlook.chance_by_plan, outlook.chance_by_booking);
  EXPECT_NEAR(outlook.at_plan.centre, 2 * std::sqrt(35.0), 1e-9) << "after all 1,024 scans";
}

TEST(Outlook, ABlankIsDecidedWhenItsLimitHasFallenFarEnough) {
  const Requirement unseen = Unseen({1, 2, 3});
  const Outlook outlook = LookAhead(Of({unseen}), Question());
  EXPECT_NEAR(outlook.decided_by, 2048 * std::pow(unseen.reading.upper / 10, 2), 1e-9);
  EXPECT_EQ(LookAhead(Of({Seen(5)}), Question()).decided_by, 0);
}

}  // namespace
}  // namespace lastscan::engine
