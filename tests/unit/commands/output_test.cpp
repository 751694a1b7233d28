// What the commands print: JSON Lines, tables, CSV, one-line errors, cautions.
#include <gmock/gmock.h>
#include <google/protobuf/util/json_util.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <limits>

#include "commands/json_line.h"
#include "commands/table.h"
#include "commands/terminal.h"
#include "engine/advice/cautions.h"
#include "lastscan/v1/ledger.pb.h"

namespace lastscan::commands {
namespace {

using ::testing::HasSubstr;
using ::testing::Not;

TEST(JsonLine, PrintsEveryFieldOfAnEmptyAdvice) {
  const std::string json = JsonLine(v1::Advice());
  const auto* fields = v1::Advice::descriptor();
  for (int i = 0; i < fields->field_count(); ++i) {
    EXPECT_THAT(json, HasSubstr("\"" + fields->field(i)->json_name() + "\":"));
  }
  EXPECT_THAT(json, HasSubstr("\"finishAt\":{\"estimate\":null,\"lower\":null,\"upper\":null}"));
  EXPECT_THAT(json, Not(HasSubstr("\n")));
}

TEST(JsonLine, ReadsBackAsTheSameAdvice) {
  v1::Advice advice;
  advice.set_run("night \"12\"\n");
  advice.mutable_issued_at()->set_seconds(1801377000);
  advice.set_scans_done(64);
  advice.mutable_goal()->set_target(30);
  advice.mutable_scans_needed()->set_upper(std::numeric_limits<double>::infinity());
  advice.mutable_finish_at()->mutable_estimate()->set_seconds(1801380000);
  advice.add_lines()->set_window(-1);
  const std::string json = JsonLine(advice);
  EXPECT_THAT(json, HasSubstr("\"upper\":\"Infinity\""));
  v1::Advice back;
  ASSERT_TRUE(google::protobuf::util::JsonStringToMessage(json, &back).ok());
  EXPECT_EQ(back.run(), advice.run());
  EXPECT_EQ(back.finish_at().SerializeAsString(), advice.finish_at().SerializeAsString());
  EXPECT_EQ(back.lines(0).window(), -1);
  EXPECT_EQ(back.scans_needed().upper(), advice.scans_needed().upper());
}

TEST(JsonLine, CarriesTheCautionsWhereTheMessageHasNone) {
  v1::RunRecord record;
  record.set_run("night");
  const std::string json = JsonLineWithCautions(record);
  EXPECT_THAT(json, HasSubstr("\"run\":\"night\""));
  for (const std::string_view caution : engine::Cautions()) {
    EXPECT_THAT(json, HasSubstr(std::string(caution)));
  }
  v1::RunRecord back;
  google::protobuf::util::JsonParseOptions lenient;
  lenient.ignore_unknown_fields = true;
  EXPECT_TRUE(google::protobuf::util::JsonStringToMessage(json, &back, lenient).ok());
}

TEST(Table, AlignsAndEscapes) {
  const std::string table =
      AsTable({{"run", "scans"}, {"na\033[31mme", "7"}, {"b", "12345"}}, {false, true});
  EXPECT_THAT(table, Not(HasSubstr("\033")));
  EXPECT_THAT(table, HasSubstr("b          12345\n"));
  EXPECT_EQ(std::count(table.begin(), table.end(), '\n'), 4);
}

TEST(Table, CsvQuotesAndDisarms) {
  EXPECT_EQ(AsCsvLine({"a", "b,c", "say \"x\"", ""}), "a,\"b,c\",\"say \"\"x\"\"\",\n");
  EXPECT_EQ(AsCsvLine({"=1+1", "-3.5", "-x"}), "\"'=1+1\",-3.5,\"'-x\"\n");
}

TEST(Output, ErrorsStayOnOneLine) {
  const std::string line = OneLine("first\nsecond\033[2J\r\n");
  EXPECT_THAT(line, ::testing::StartsWith("first second"));
  EXPECT_THAT(line, Not(HasSubstr("\n")));
  EXPECT_THAT(line, Not(HasSubstr("\033")));
  EXPECT_THAT(line, Not(HasSubstr("\r")));
}

TEST(Output, CautionsAreWholeAtAnyWidth) {
  for (const int width : {30, 80, 200}) {
    drawing::Style style;
    style.width = width;
    std::string text = CautionsInFull(style);
    std::replace(text.begin(), text.end(), '\n', ' ');
    for (std::size_t at = text.find("  "); at != std::string::npos; at = text.find("  ")) {
      text.erase(at, 1);
    }
    for (const std::string_view caution : engine::Cautions()) {
      EXPECT_THAT(text, HasSubstr(std::string(caution))) << width;
    }
  }
}

}  // namespace
}  // namespace lastscan::commands
