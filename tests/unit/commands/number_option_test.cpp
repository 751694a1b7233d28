// Numbers and ranges of the command line: what is accepted, and that everything
// else is refused with the option's name in the message.
#include "commands/number_option.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "commands/command.h"

namespace lastscan::commands {
namespace {

using ::testing::AllOf;
using ::testing::HasSubstr;
using ::testing::ThrowsMessage;

auto RefusedFor(const std::string& option, const std::string& text) {
  return ThrowsMessage<WrongUse>(AllOf(HasSubstr(option), HasSubstr("\"" + text + "\"")));
}

TEST(NumberOption, ReadsPositiveNumbersOnly) {
  EXPECT_EQ(ReadPositive("--target", "30"), 30);
  EXPECT_EQ(ReadPositive("--target", "2.5e1"), 25);
  for (const char* text :
       {"0", "-3", "nan", "inf", "-inf", "", "3x", " 3", "3 ", "1e999", "0x10"}) {
    EXPECT_THAT([&] { ReadPositive("--target", text); }, RefusedFor("--target", text));
  }
}

TEST(NumberOption, ReadsSharesBetweenZeroAndOne) {
  EXPECT_EQ(ReadShare("--assurance", "0.95"), 0.95);
  for (const char* text : {"0", "1", "-0.1", "1.5", "nan", "95%"}) {
    EXPECT_THAT([&] { ReadShare("--assurance", text); }, RefusedFor("--assurance", text));
  }
}

TEST(NumberOption, ReadsWholeNumbersWithinBounds) {
  EXPECT_EQ(ReadCount("--lines", "12", 100), 12u);
  EXPECT_EQ(ReadCount("--lines", "100", 100), 100u);
  for (const char* text : {"0", "101", "-1", "1.5", "", "99999999999999999999999"}) {
    EXPECT_THAT([&] { ReadCount("--lines", text, 100); }, RefusedFor("--lines", text));
  }
}

TEST(NumberOption, ReadsRangesLowFirst) {
  const v1::ShiftRange range = ReadRange("--window", "-5.5:200");
  EXPECT_EQ(range.low_ppm(), -5.5);
  EXPECT_EQ(range.high_ppm(), 200);
  for (const char* text : {"200:100", "20:20", "20", ":", "20:", ":20", "a:b", "nan:20", "1:2:3"}) {
    EXPECT_THAT([&] { ReadRange("--window", text); }, RefusedFor("--window", text));
  }
}

}  // namespace
}  // namespace lastscan::commands
