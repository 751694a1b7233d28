// Verdicts and what they recommend: who is told what, that nothing flickers,
// and that scans come in whole phase cycles inside the booking.
#include "engine/advice/verdict.h"

#include <gtest/gtest.h>

#include <cmath>
#include <limits>
#include <numbers>

#include "engine/advice/assembly.h"
#include "engine/advice/wording.h"

namespace lastscan::engine {
namespace {

constexpr double kInfinity = std::numeric_limits<double>::infinity();

Case Middle() {
  Case facts;
  facts.confirmed = true;
  facts.scans = 256;
  facts.planned = 1024;
  facts.booked = 4096;
  facts.phase_cycle = 16;
  facts.outlook.chance_by_plan = 0.6;
  facts.outlook.chance_by_booking = 0.9;
  facts.outlook.scans_to_threshold = 900;
  return facts;
}

std::vector<v1::Finding> OfSeverity(v1::Severity severity) {
  std::vector<v1::Finding> findings(1);
  findings[0].set_severity(severity);
  return findings;
}

TEST(Judge, GivesEachVerdictItsCase) {
  EXPECT_EQ(Judge(Middle(), {}), v1::ON_COURSE);
  Case facts = Middle();
  facts.outlook.chance_by_plan = 0.2;
  EXPECT_EQ(Judge(facts, {}), v1::EXTEND);
  facts.outlook.chance_by_booking = 0.04;
  EXPECT_EQ(Judge(facts, {}), v1::OUT_OF_REACH);
  facts = Middle();
  facts.confirmed = false;
  EXPECT_EQ(Judge(facts, {}), v1::UNDECIDED);
  facts.outlook.chance_by_booking = 0.04;
  EXPECT_EQ(Judge(facts, {}), v1::OUT_OF_REACH) << "a blank is hopeless too";
  facts = Middle();
  facts.outlook.stop_rule_met = true;
  EXPECT_EQ(Judge(facts, {}), v1::ENOUGH);
  EXPECT_EQ(Judge(Middle(), OfSeverity(v1::HIGH)), v1::INSPECT);
  EXPECT_EQ(Judge(Middle(), OfSeverity(v1::WARNING)), v1::ON_COURSE);
  facts = Middle();
  facts.planned = 0;
  facts.outlook.chance_by_plan = 0;
  EXPECT_EQ(Judge(facts, {}), v1::ON_COURSE) << "without a plan there is none to extend";
}

TEST(Judge, EnoughStaysEnough) {
  Case facts = Middle();
  facts.previous = v1::ENOUGH;
  facts.outlook.chance_by_booking = 0;
  EXPECT_EQ(Judge(facts, OfSeverity(v1::HIGH)), v1::ENOUGH);
}

TEST(Judge, AVerdictNeedsMoreToTurnBackThanItNeededToTurn) {
  Case facts = Middle();
  const auto at = [&](v1::Verdict previous, double by_plan) {
    facts.previous = previous;
    facts.outlook.chance_by_plan = by_plan;
    return Judge(facts, {});
  };
  for (const double chance : {0.25, 0.5, 0.75}) {
    EXPECT_EQ(at(v1::ON_COURSE, chance), v1::ON_COURSE);
    EXPECT_EQ(at(v1::EXTEND, chance), v1::EXTEND);
  }
  EXPECT_EQ(at(v1::ON_COURSE, 0.15), v1::EXTEND);
  EXPECT_EQ(at(v1::EXTEND, 0.85), v1::ON_COURSE);
  facts.outlook.chance_by_booking = 0.07;
  EXPECT_EQ(at(v1::OUT_OF_REACH, 0.01), v1::OUT_OF_REACH);
  EXPECT_EQ(at(v1::EXTEND, 0.01), v1::EXTEND);
  facts.outlook.chance_by_booking = 0.12;
  EXPECT_EQ(at(v1::OUT_OF_REACH, 0.01), v1::EXTEND);
  facts.out_of_reach_chance = 0.2;
  EXPECT_EQ(at(v1::EXTEND, 0.01), v1::OUT_OF_REACH) << "as the settings say";
}

constexpr v1::Verdict kAll[] = {v1::UNDECIDED, v1::ON_COURSE,    v1::ENOUGH,
                                v1::EXTEND,    v1::OUT_OF_REACH, v1::INSPECT};

TEST(ScansAdvised, ComeInWholeCyclesAndNeverBelowWhatIsDone) {
  for (const v1::Verdict verdict : kAll) {
    for (const double planned : {0.0, 100.0, 1001.0, 5000.0}) {
      for (const double needed : {10.0, 700.5, 9000.0, kInfinity}) {
        for (const double booked : {260.0, 1500.0, kInfinity}) {
          Case facts = Middle();
          facts.scans = 250;
          facts.planned = planned;
          facts.booked = booked;
          facts.outlook.scans_to_threshold = needed;
          const std::uint64_t advised = ScansAdvised(verdict, facts);
          EXPECT_EQ(advised % 16, 0u) << v1::Verdict_Name(verdict) << ' ' << planned;
          EXPECT_GE(advised, 250u) << v1::Verdict_Name(verdict);
        }
      }
    }
  }
}

TEST(ScansAdvised, StayInsideTheBooking) {
  for (const v1::Verdict verdict : kAll) {
    Case facts = Middle();
    facts.booked = 700;
    facts.planned = 2000;
    facts.outlook.scans_to_threshold = 1900;
    EXPECT_LE(ScansAdvised(verdict, facts), 700u) << v1::Verdict_Name(verdict);
  }
}

TEST(ScansAdvised, AreTheOnesThatAreNeeded) {
  Case facts = Middle();
  EXPECT_EQ(ScansAdvised(v1::ON_COURSE, facts), 912u);
  EXPECT_EQ(ScansAdvised(v1::ENOUGH, facts), 256u);
  EXPECT_EQ(ScansAdvised(v1::OUT_OF_REACH, facts), 256u);
  EXPECT_EQ(ScansAdvised(v1::UNDECIDED, facts), 1024u);
  facts.outlook.scans_to_threshold = 2000;
  EXPECT_EQ(ScansAdvised(v1::EXTEND, facts), 2000u);
  EXPECT_EQ(ScansAdvised(v1::ON_COURSE, facts), 1024u) << "the plan, as long as it holds";
  facts.scans = 257;
  EXPECT_EQ(ScansAdvised(v1::ENOUGH, facts), 272u);
}

TEST(Matched, TheBroadeningThatServesBestIsTheLinesOwnWidth) {
  // Ernst, Adv. Magn. Reson. 1966, 2, 1. For an FID that has decayed, height
  // over noise goes as sqrt(b) / (w + b): at its best at b = w.
  for (const double width : {0.7, 3.0}) {
    const MatchedBroadening from_quarter = Matched(width, width / 4, 50);
    EXPECT_DOUBLE_EQ(from_quarter.hz, width);
    EXPECT_NEAR(from_quarter.gain, (1 / 2.0) / (0.5 / 1.25), 1e-6);
    EXPECT_NEAR(Matched(width, width, 50).gain, 1, 1e-12);
    EXPECT_GT(Matched(width, 0, 1).gain, 1);
  }
}

TEST(Matched, GainIsWhatTheSumsOverAShortFidSay) {
  const auto ratio = [](double width, double broadening) {
    double height = 0;
    double power = 0;
    for (int t = 0; t < 100000; ++t) {
      const double at = (t + 0.5) * 0.4 / 100000;
      height += std::exp(-std::numbers::pi * (width + broadening) * at);
      power += std::exp(-2 * std::numbers::pi * broadening * at);
    }
    return height / std::sqrt(power);
  };
  EXPECT_NEAR(Matched(2, 0.3, 0.4).gain, std::max(1.0, ratio(2, 2) / ratio(2, 0.3)), 1e-6);
  EXPECT_NEAR(Matched(2, 9, 0.4).gain, std::max(1.0, ratio(2, 2) / ratio(2, 9)), 1e-6);
}

TEST(Wording, NumbersReadAsAnOperatorWritesThem) {
  EXPECT_EQ(Rounded(2.346), "2.35");
  EXPECT_EQ(Rounded(23.46), "23.5");
  EXPECT_EQ(Rounded(2345), "2345");
  EXPECT_EQ(Scans(999), "999");
  EXPECT_EQ(Scans(1024), "1,024");
  EXPECT_EQ(Scans(1234567.4), "1,234,567");
  EXPECT_EQ(Scans(kInfinity), "more than a million million");
  EXPECT_EQ(Percent(0.043), "4.3 %");
  EXPECT_EQ(Percent(0.5), "50 %");
  EXPECT_EQ(Duration(40), "40 s");
  EXPECT_EQ(Duration(600), "10 min");
  EXPECT_EQ(Duration(3 * 3600 + 12 * 60), "3 h 12 min");
  EXPECT_EQ(Duration(2 * 86400 + 3600), "2 d 1 h");
  EXPECT_EQ(ClockTime(1801382400), "2027-01-31 08:00 UTC");
  EXPECT_EQ(Shift(128.374), "128.37 ppm");
}

}  // namespace
}  // namespace lastscan::engine
