// Times of the command line, in a fixed zone with summer time.
#include "commands/time_option.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cstdlib>

#include "commands/command.h"

namespace lastscan::commands {
namespace {

using ::testing::HasSubstr;
using ::testing::ThrowsMessage;

// A zone written out as POSIX has it, so that no zone files are needed: one hour
// east of Greenwich, summer time from the last Sunday of March, 02:00, to the
// last Sunday of October, 03:00.
class TimeOption : public ::testing::Test {
 protected:
  void SetUp() override {
    const char* zone = std::getenv("TZ");
    if (zone != nullptr) before_ = zone;
    had_zone_ = zone != nullptr;
    setenv("TZ", "LAB-1LABS,M3.5.0/2,M10.5.0/3", 1);
    tzset();
  }
  void TearDown() override {
    if (had_zone_) {
      setenv("TZ", before_.c_str(), 1);
    } else {
      unsetenv("TZ");
    }
    tzset();
  }

  static std::int64_t Seconds(const std::string& text, std::time_t now = 0) {
    return ReadTime("--booking-end", text, now).seconds();
  }

 private:
  std::string before_;
  bool had_zone_ = false;
};

// 2027-01-31 06:30:00 UTC; from `date -u -d 2027-01-31T06:30:00 +%s`.
constexpr std::int64_t kMorning = 1801377000;

TEST_F(TimeOption, ReadsRfc3339) {
  EXPECT_EQ(Seconds("2027-01-31T07:30:00+01:00"), kMorning);
  EXPECT_EQ(Seconds("2027-01-31T06:30:00Z"), kMorning);
  EXPECT_EQ(Seconds("2027-01-31T01:30:00-05:00"), kMorning);
}

TEST_F(TimeOption, ReadsLocalTime) {
  EXPECT_EQ(Seconds("2027-01-31 07:30"), kMorning);
  EXPECT_EQ(Seconds("2027-01-31 07:30:20"), kMorning + 20);
  // In summer the same clock time is an hour earlier in UTC: 05:30.
  EXPECT_EQ(Seconds("2027-07-31 07:30") % 86400, 5 * 3600 + 1800);
}

TEST_F(TimeOption, TimeOfDayIsTheNextOne) {
  EXPECT_EQ(Seconds("07:30", kMorning - 1), kMorning);
  EXPECT_EQ(Seconds("07:30", kMorning), kMorning + 86400);
  EXPECT_EQ(Seconds("07:29", kMorning), kMorning + 86400 - 60);
  EXPECT_EQ(Seconds("23:00", kMorning), kMorning + 15 * 3600 + 1800);
}

TEST_F(TimeOption, TimeOfDayAcrossTheChangeOfSummerTime) {
  // Saturday 2027-03-27 20:00 local; that night has 23 hours.
  const std::time_t evening = Seconds("2027-03-27 20:00");
  EXPECT_EQ(Seconds("07:30", evening), evening + 10 * 3600 + 1800);
  // 02:30 does not exist on that Sunday: the next one is a day later.
  EXPECT_EQ(Seconds("02:30", evening), Seconds("2027-03-29 02:30"));
}

TEST_F(TimeOption, RefusesWhatIsNoTime) {
  for (const char* text : {"", "tomorrow", "25:00", "07:60", "2027-02-30 07:30", "2027-01-31",
                           "2027-03-28 02:30", "2027-01-31 07:30 or so", "7.30"}) {
    EXPECT_THAT([&] { Seconds(text); }, ThrowsMessage<WrongUse>(HasSubstr("--booking-end")))
        << text;
  }
}

}  // namespace
}  // namespace lastscan::commands
