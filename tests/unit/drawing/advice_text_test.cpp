// Advice in words: order, width, safety, and nothing that is not a word.
#include "drawing/advice_text.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <regex>

#include "drawing/escape.h"
#include "drawing/wrap.h"
#include "engine/advice/cautions.h"
#include "unit/drawing/invented_advice.h"

namespace lastscan::drawing {
namespace {

using testing::HasSubstr;
using testing::Not;

std::string Joined(const std::string& text) {
  return std::regex_replace(text, std::regex("\\s+"), " ");
}

v1::Advice BusyAdvice(v1::Verdict verdict) {
  v1::Advice advice = test::LawfulAdvice(512);
  advice.set_verdict(verdict);
  advice.set_sample("an_unbroken_name_" + std::string(200, 'x') + "試料");
  advice.set_scans_saved(400);
  advice.set_seconds_saved(1000);
  advice.set_matched_gain(1.3);
  advice.set_matched_broadening_hz(4);
  v1::Finding* finding = advice.add_findings();
  finding->set_kind(v1::AMPLITUDE_LOSS);
  finding->set_severity(v1::HIGH);
  finding->set_since_scan(300);
  finding->set_detail("The limiting line has lost 12 % since scan 300: check tuning and lock.");
  for (int i = 0; i < 30; ++i) {
    v1::Line* line = advice.add_lines();
    line->set_shift_ppm(10 + 5 * i);
    line->set_width_hz(3);
    line->set_confirmed(i % 2 == 0);
    line->set_window(i % 3 - 1);
    line->mutable_signal_to_noise()->set_estimate(7);
    line->mutable_signal_to_noise()->set_lower(5);
    line->mutable_signal_to_noise()->set_upper(9);
  }
  return advice;
}

TEST(AdviceInFull, StaysWithinTheWidth) {
  for (v1::Verdict verdict : test::AllVerdicts()) {
    for (int width : {20, 37, 47, 48, 80, 132}) {
      Style style;
      style.width = width;
      const std::string text = AdviceInFull(BusyAdvice(verdict), style);
      EXPECT_EQ(text.back(), '\n');
      for (const std::string& line : test::LinesOf(text)) {
        EXPECT_LE(Columns(line), width) << line;
      }
    }
  }
}

TEST(AdviceInFull, BeginsWithTheVerdictAndEndsWithTheCautions) {
  const std::string text = Joined(AdviceInFull(BusyAdvice(v1::OUT_OF_REACH), Style{}));
  EXPECT_THAT(text, testing::StartsWith("OUT OF REACH. "));
  const std::size_t cautions = text.find("Cautions");
  ASSERT_NE(cautions, std::string::npos);
  EXPECT_LT(text.find("Signal-to-noise"), text.find("Findings"));
  EXPECT_LT(text.find("Findings"), cautions);
  for (std::string_view caution : engine::Cautions()) {
    EXPECT_GT(text.find(caution, cautions), cautions);
    EXPECT_NE(text.find(caution, cautions), std::string::npos) << caution;
  }
}

TEST(AdviceInFull, CarriesTheCautionsEvenWhenTheAdviceDoesNot) {
  v1::Advice advice = test::LawfulAdvice(512);
  advice.clear_cautions();
  const std::string text = Joined(AdviceInFull(advice, Style{}));
  for (std::string_view caution : engine::Cautions()) {
    EXPECT_THAT(text, HasSubstr(std::string(caution)));
  }
}

TEST(Advice, NeverSaysNan) {
  const std::regex not_a_word("\\b-?(nan|inf|infinity)\\b", std::regex::icase);
  for (v1::Verdict verdict : test::AllVerdicts()) {
    for (bool confirmed : {false, true}) {
      v1::Advice advice = test::AdviceOfNoNumbers();
      advice.set_verdict(verdict);
      advice.mutable_limiting_line()->set_confirmed(confirmed);
      const std::string text = AdviceInFull(advice, Style{}) + AdviceLine(advice, Style{});
      EXPECT_FALSE(std::regex_search(text, not_a_word)) << text;
    }
  }
}

TEST(Advice, SaysUpperLimitsInWords) {
  const v1::Advice advice = test::LawfulAdvice(64);  // unconfirmed, endless upper limit
  const std::string full = AdviceInFull(advice, Style{});
  EXPECT_THAT(full, HasSubstr("below 5.2 so far"));
  EXPECT_THAT(full, HasSubstr("or more)"));
  EXPECT_THAT(AdviceLine(advice, Style{}), HasSubstr("below 5.2 so far"));
  // What is not confirmed has no place and no forecast.
  EXPECT_THAT(full, Not(HasSubstr("Limiting line")));
  EXPECT_THAT(full, Not(HasSubstr("At the planned end")));
}

TEST(Advice, LetsNoControlCharacterThrough) {
  v1::Advice advice = BusyAdvice(v1::INSPECT);
  const std::string hostile = "\033]0;gone\007\r\n\033[2J";
  advice.set_sample(hostile);
  advice.set_run(hostile);
  advice.set_instrument(hostile);
  advice.set_because(hostile);
  advice.mutable_findings(0)->set_detail(hostile);
  for (const std::string& text : {AdviceInFull(advice, Style{}), AdviceLine(advice, Style{})}) {
    for (char c : text) {
      EXPECT_TRUE(c == '\n' || static_cast<unsigned char>(c) >= 0x20) << static_cast<int>(c);
    }
  }
}

TEST(AdviceLine, IsOneLineWithNumberAndTime) {
  v1::Advice advice = test::LawfulAdvice(512);
  const std::string line = AdviceLine(advice, Style{});
  EXPECT_THAT(line, Not(HasSubstr("\n")));
  EXPECT_THAT(line, testing::StartsWith("scan 512 of 1024: ON COURSE; signal-to-noise 9.1 ("));
  EXPECT_THAT(line, HasSubstr("goal 10;"));
  EXPECT_THAT(line, HasSubstr("needs 625 (438 to 1000) scans"));
  advice.set_verdict(v1::ENOUGH);
  advice.set_scans_advised(520);
  advice.set_scans_saved(504);
  advice.set_seconds_saved(1260);
  EXPECT_THAT(AdviceLine(advice, Style{}),
              HasSubstr("stop at scan 520, saves 504 scans and 21 min"));
}

TEST(Advice, ColoursOnlyWhenAsked) {
  const v1::Advice advice = BusyAdvice(v1::ENOUGH);
  Style colour;
  colour.colour = true;
  const std::regex codes("\033\\[[0-9;]*m");
  for (auto write : {AdviceInFull, AdviceLine}) {
    const std::string plain = write(advice, Style{});
    const std::string coloured = write(advice, colour);
    EXPECT_THAT(plain, Not(HasSubstr("\033")));
    EXPECT_THAT(coloured, HasSubstr("\033["));
    EXPECT_EQ(std::regex_replace(coloured, codes, ""), plain) << "colour changes only colours";
  }
}

TEST(Wrapped, LosesNoWord) {
  const std::string text = "one two  three\nfour " + std::string(30, 'a') + " 12 %: of five";
  for (int width = 12; width < 60; ++width) {
    const std::string wrapped = Wrapped(text, width, "- ", "  ");
    std::string got;
    for (char c : wrapped.substr(2)) {
      if (c != ' ' && c != '\n') got += c;
    }
    std::string want;
    for (char c : text) {
      if (c != ' ' && c != '\n') want += c;
    }
    EXPECT_EQ(got, want);
    EXPECT_THAT(wrapped, HasSubstr("12 %:"));
  }
}

}  // namespace
}  // namespace lastscan::drawing
