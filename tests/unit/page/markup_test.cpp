// The page's HTML: every verdict, every caution, nothing hostile, nothing that
// the Content-Security-Policy would stop.
#include "page/markup.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <regex>
#include <set>

#include "drawing/words.h"
#include "engine/advice/cautions.h"
#include "unit/drawing/invented_advice.h"

namespace lastscan::page {
namespace {

using testing::HasSubstr;
using testing::Not;

constexpr std::time_t kNow = 1'800'002'000;

Shelf ShelfOfAllVerdicts() {
  Shelf shelf;
  shelf.read_once = true;
  for (v1::Verdict verdict : test::AllVerdicts()) {
    v1::Advice advice = test::LawfulAdvice(512);
    advice.set_verdict(verdict);
    advice.set_run("run " + std::to_string(verdict));
    v1::Line* line = advice.add_lines();
    line->set_shift_ppm(128.42);
    line->mutable_signal_to_noise()->set_upper(4);
    shelf.runs.push_back(advice);
  }
  return shelf;
}

std::vector<std::string> AllPages() {
  const Shelf shelf = ShelfOfAllVerdicts();
  std::vector<std::string> pages = {RunsPage(shelf, "ipc:///run/socket", kNow),
                                    RunsPage(Shelf{}, "ipc:///run/socket", kNow),
                                    TroublePage("Nothing here", "There is no such page.")};
  for (const v1::Advice& advice : shelf.runs) {
    pages.push_back(RunPage(shelf, {advice}, "ipc:///run/socket"));
  }
  return pages;
}

TEST(Markup, EveryPageCarriesEveryCaution) {
  for (const std::string& page : AllPages()) {
    for (std::string_view caution : engine::Cautions()) {
      const std::string escaped =
          std::regex_replace(std::string(caution), std::regex("'"), "&#39;");
      EXPECT_THAT(page, HasSubstr(escaped));
    }
  }
}

TEST(Markup, HoldsNothingThatThePolicyStops) {
  const std::regex inline_code("<script(?! src=)|<style|\\sstyle=|\\son[a-z]+=|javascript:|http:",
                               std::regex::icase);
  for (const std::string& page : AllPages()) {
    EXPECT_FALSE(std::regex_search(page, inline_code)) << page;
    EXPECT_THAT(page, HasSubstr("<html lang=\"en\">"));
    EXPECT_THAT(page, HasSubstr("name=\"viewport\""));
  }
}

TEST(Markup, EveryPartOfMainHasAnIdOfItsOwn) {
  const std::regex ids(" id=\"([^\"]*)\"");
  for (const std::string& page : AllPages()) {
    std::set<std::string> seen;
    for (auto it = std::sregex_iterator(page.begin(), page.end(), ids);
         it != std::sregex_iterator(); ++it) {
      EXPECT_TRUE(seen.insert((*it)[1]).second) << (*it)[1];
    }
    EXPECT_TRUE(seen.contains("live"));
  }
}

TEST(Markup, ShowsEveryVerdictInWords) {
  const std::string page = RunsPage(ShelfOfAllVerdicts(), "ipc:///run/socket", kNow);
  for (v1::Verdict verdict : test::AllVerdicts()) {
    EXPECT_THAT(
        page, HasSubstr("<strong>" + std::string(drawing::VerdictInWords(verdict)) + "</strong>"));
  }
  EXPECT_THAT(page, HasSubstr("6 current runs: 1 inspect, 1 out of reach, 1 enough"));
}

TEST(Markup, EscapesWhateverComesFromOutside) {
  const std::string hostile = "\"'><script>alert(1)</script>\033[2J";
  Shelf shelf = ShelfOfAllVerdicts();
  shelf.trouble = hostile;
  shelf.answered_at = kNow;
  for (v1::Advice& advice : shelf.runs) {
    advice.set_run(hostile + std::to_string(advice.verdict()));
    advice.set_sample(hostile);
    advice.set_instrument(hostile);
    advice.set_nucleus(hostile);
    advice.set_because(hostile);
    v1::Finding* finding = advice.add_findings();
    finding->set_detail(hostile);
  }
  for (const std::string& page :
       {RunsPage(shelf, hostile, kNow), RunPage(shelf, {shelf.runs[0]}, hostile),
        TroublePage(hostile, hostile)}) {
    EXPECT_THAT(page, Not(HasSubstr("<script>")));
    EXPECT_THAT(page, Not(HasSubstr("\033")));
    EXPECT_THAT(page, Not(HasSubstr("\"'>")));
    EXPECT_THAT(page, HasSubstr("&lt;script&gt;alert(1)"));
  }
}

TEST(Markup, NeverSaysNan) {
  Shelf shelf;
  shelf.read_once = true;
  v1::Advice advice = test::AdviceOfNoNumbers();
  const std::regex not_a_word("\\b-?(nan|inf|infinity)\\b", std::regex::icase);
  for (bool confirmed : {false, true}) {
    advice.mutable_limiting_line()->set_confirmed(confirmed);
    shelf.runs = {advice};
    EXPECT_FALSE(std::regex_search(RunsPage(shelf, "x", kNow), not_a_word));
    EXPECT_FALSE(std::regex_search(RunPage(shelf, {advice}, "x"), not_a_word));
  }
}

TEST(Markup, PutsOldRunsBelow) {
  Shelf shelf = ShelfOfAllVerdicts();
  shelf.runs[0].mutable_issued_at()->set_seconds(kNow - 86400);
  shelf.runs[0].set_sample("yesterday");
  const std::string page = RunsPage(shelf, "x", kNow);
  EXPECT_GT(page.find("yesterday"), page.find("Earlier runs"));
  EXPECT_THAT(page, HasSubstr("5 current runs"));
}

}  // namespace
}  // namespace lastscan::page
