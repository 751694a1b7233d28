// Numbers, times and terms in words.
#include "drawing/words.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <stdlib.h>
#include <time.h>

#include <limits>
#include <set>

#include "unit/drawing/invented_advice.h"

namespace lastscan::drawing {
namespace {

constexpr double kNone = std::numeric_limits<double>::quiet_NaN();
constexpr double kEndless = std::numeric_limits<double>::infinity();

google::protobuf::Timestamp At(std::int64_t seconds) {
  google::protobuf::Timestamp time;
  time.set_seconds(seconds);
  return time;
}

v1::Interval Between(double estimate, double lower, double upper) {
  v1::Interval interval;
  interval.set_estimate(estimate);
  interval.set_lower(lower);
  interval.set_upper(upper);
  return interval;
}

TEST(Number, KeepsAboutThreeDigits) {
  EXPECT_EQ(Number(0.4231), "0.42");
  EXPECT_EQ(Number(4.06), "4.1");
  EXPECT_EQ(Number(9.97), "10.0");
  EXPECT_EQ(Number(99.96), "100");
  EXPECT_EQ(Number(12345.4), "12345");
  EXPECT_EQ(Number(-3.14), "-3.1");
  EXPECT_EQ(Brief(10), "10");
  EXPECT_EQ(Brief(2.5), "2.5");
  EXPECT_EQ(Scans(780.2), "781");
  EXPECT_EQ(Scans(781), "781");
}

TEST(Number, HasWordsForWhatIsNone) {
  EXPECT_EQ(Number(kNone), "not known");
  EXPECT_EQ(Number(kEndless), "unlimited");
  EXPECT_EQ(Scans(kEndless), "unlimited");
  EXPECT_EQ(DurationInWords(kEndless), "unlimited");
  EXPECT_EQ(DurationInWords(kNone), "not known");
  for (double value : {1e-300, 1e9, 1e300, -1e300, 5e-324}) {
    EXPECT_THAT(Number(value), testing::Not(testing::HasSubstr("inf")));
    EXPECT_LE(Number(value).size(), 10u);
  }
}

TEST(WithLimits, SaysAnInfiniteUpperLimitInWords) {
  EXPECT_EQ(WithLimits(Between(12.34, 10.9, 13.6)), "12.3 (10.9 to 13.6)");
  EXPECT_EQ(WithLimits(Between(12.34, 10.9, kEndless)), "12.3 (10.9 or more)");
  EXPECT_EQ(ScansWithLimits(Between(kEndless, 900, kEndless)), "unlimited (900 or more)");
  EXPECT_EQ(WithLimits(Between(kNone, 1, 2)), "not known");
}

TEST(Chance, IsNeverQuiteNoneAndNeverQuiteCertain) {
  EXPECT_EQ(Chance(0.973), "97 %");
  EXPECT_EQ(Chance(1), "over 99 %");
  EXPECT_EQ(Chance(0), "under 1 %");
  EXPECT_EQ(Chance(kNone), "");
  EXPECT_EQ(ExponentWithLimits(Between(0.507, 0.5, 0.514)), "0.51 (0.50 to 0.51)");
}

TEST(ReadingInWords, AnUnconfirmedLineHasOnlyAnUpperLimit) {
  v1::Advice advice = test::LawfulAdvice(64);
  ASSERT_FALSE(advice.limiting_line().confirmed());
  advice.mutable_signal_to_noise()->set_upper(4.1);
  EXPECT_EQ(ReadingInWords(advice), "below 4.1 so far");
  advice.mutable_signal_to_noise()->set_upper(kEndless);
  EXPECT_EQ(ReadingInWords(advice), "no line seen so far");
}

TEST(DurationInWords, UsesTheTwoLargestUnits) {
  EXPECT_EQ(DurationInWords(40.2), "40 s");
  EXPECT_EQ(DurationInWords(60), "1 min");
  EXPECT_EQ(DurationInWords(3 * 3600 + 12 * 60 + 59), "3 h 12 min");
  EXPECT_EQ(DurationInWords(86400 + 5), "1 d");
  EXPECT_EQ(DurationInWords(0), "0 s");
  EXPECT_EQ(DurationInWords(-3), "0 s");
}

TEST(ClockTime, NamesTheDayOnlyWhenItIsAnother) {
  setenv("TZ", "UTC", 1);
  tzset();
  const auto seen = At(1'800'000'000);  // 2027-01-15 08:00
  EXPECT_EQ(ClockTime(At(1'800'000'000 + 3720), seen), "09:02");
  EXPECT_EQ(ClockTime(At(1'800'000'000 + 86400), seen), "16 Jan 08:00");
  EXPECT_EQ(ClockTime(At(1'800'000'000 + 400LL * 86400), seen), "19 Feb 2028 08:00");
  EXPECT_EQ(ClockTime(At(std::numeric_limits<std::int64_t>::max()), seen), "");
  v1::TimeInterval times;
  EXPECT_EQ(ClockTimes(times, seen), "");
  *times.mutable_estimate() = At(1'800'003'600);
  *times.mutable_lower() = At(1'800'001'800);
  EXPECT_EQ(ClockTimes(times, seen), "09:00 (08:30 or later)");
}

TEST(Verdicts, HaveEachTheirOwnWordsAndUrgency) {
  std::set<std::string_view> words;
  std::set<int> urgencies;
  std::set<std::string> sentences;
  for (v1::Verdict verdict : test::AllVerdicts()) {
    v1::Advice advice = test::LawfulAdvice(512);
    advice.set_verdict(verdict);
    words.insert(VerdictInWords(verdict));
    urgencies.insert(Urgency(verdict));
    sentences.insert(WhatToDo(advice));
  }
  EXPECT_EQ(words.size(), 6u);
  EXPECT_EQ(urgencies.size(), 6u);
  EXPECT_EQ(sentences.size(), 6u);
}

TEST(WhatToDo, NamesTheScan) {
  v1::Advice advice = test::LawfulAdvice(512);
  advice.set_verdict(v1::ENOUGH);
  advice.set_scans_advised(520);
  EXPECT_THAT(WhatToDo(advice), testing::HasSubstr("scan 520"));
  advice.set_scans_advised(512);
  EXPECT_EQ(WhatToDo(advice), "You may stop now.");
  advice.set_verdict(v1::EXTEND);
  advice.set_scans_advised(1424);
  EXPECT_THAT(WhatToDo(advice), testing::HasSubstr("Add 400 scans"));
  EXPECT_THAT(WhatToDo(advice), testing::HasSubstr("1424 in all"));
}

TEST(Findings, HaveEachTheirOwnWords) {
  std::set<std::string_view> words;
  for (int kind = v1::FindingKind_MIN + 1; kind <= v1::FindingKind_MAX; ++kind) {
    words.insert(FindingInWords(static_cast<v1::FindingKind>(kind)));
  }
  EXPECT_EQ(words.size(), static_cast<std::size_t>(v1::FindingKind_MAX));
  EXPECT_FALSE(words.contains(FindingInWords(v1::FINDING_KIND_UNSPECIFIED)));
}

}  // namespace
}  // namespace lastscan::drawing
