// The screen of `lastscan watch`: it fits the terminal, keeps the newest advice
// and never shows a name raw.
#include "commands/watch_view.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <sstream>

#include "commands/command.h"
#include "drawing/escape.h"
#include "engine/advice/cautions.h"

namespace lastscan::commands {
namespace {

using ::testing::HasSubstr;
using ::testing::Not;

v1::Advice MakeAdvice(const std::string& run, std::uint64_t scans,
                      v1::Verdict verdict = v1::ON_COURSE) {
  v1::Advice advice;
  advice.set_run(run);
  advice.set_instrument("bench-1");
  advice.set_sample("sample of " + run);
  advice.set_nucleus("13C");
  advice.set_scans_done(scans);
  advice.set_scans_planned(1024);
  advice.set_verdict(verdict);
  advice.set_because("Because the test says so, at some length, so that lines have to be wrapped.");
  advice.mutable_goal()->set_target(30);
  advice.mutable_signal_to_noise()->set_estimate(std::sqrt(static_cast<double>(scans)));
  advice.mutable_signal_to_noise()->set_lower(std::sqrt(static_cast<double>(scans)) - 2);
  advice.mutable_signal_to_noise()->set_upper(std::sqrt(static_cast<double>(scans)) + 2);
  advice.mutable_limiting_line()->set_confirmed(true);
  for (const std::string_view caution : engine::Cautions()) {
    advice.add_cautions(std::string(caution));
  }
  return advice;
}

TEST(WatchView, FitsEveryTerminal) {
  WatchView view("", "ipc:///x");
  for (int run = 0; run < 12; ++run) {
    for (std::uint64_t scans = 64; scans <= 512; scans += 64) {
      view.Take(MakeAdvice("night-" + std::to_string(run), scans));
    }
  }
  view.Select(9);
  for (const int columns : {20, 40, 80, 200}) {
    for (const int rows : {8, 24, 50, 100}) {
      drawing::Style style;
      std::istringstream lines(view.Draw(columns, rows, style));
      std::string line;
      int count = 0;
      while (std::getline(lines, line)) {
        ++count;
        EXPECT_LE(drawing::Columns(line), columns) << line;
      }
      EXPECT_EQ(count, rows);
    }
  }
  EXPECT_THAT(view.Draw(100, 50, {}), HasSubstr("> bench-1/night-9"));
  EXPECT_THAT(view.Draw(100, 50, {}), HasSubstr(std::string(engine::CautionInShort())));
}

TEST(WatchView, KeepsTheNewest) {
  WatchView view("", "ipc:///x");
  EXPECT_TRUE(view.Take(MakeAdvice("a", 128)));
  EXPECT_FALSE(view.Take(MakeAdvice("a", 64)));
  EXPECT_FALSE(view.Take(MakeAdvice("a", 128)));
  // A run gone silent: no new scans, but another verdict.
  EXPECT_TRUE(view.Take(MakeAdvice("a", 128, v1::INSPECT)));
  ASSERT_EQ(view.Latest().size(), 1u);
  EXPECT_EQ(view.Latest()[0].verdict(), v1::INSPECT);
}

TEST(WatchView, OneRunOnly) {
  WatchView view("a", "ipc:///x");
  EXPECT_FALSE(view.Take(MakeAdvice("b", 64)));
  EXPECT_THROW(view.RequireRun(), Failure);
  EXPECT_TRUE(view.Take(MakeAdvice("a", 64)));
  view.RequireRun();
  EXPECT_EQ(view.NameColumn(MakeAdvice("a", 64)), "");
  EXPECT_THAT(view.Draw(80, 24, {}), Not(HasSubstr("sample of b")));
}

TEST(WatchView, EarlierAdviceIsFetchedOnce) {
  WatchView view("", "ipc:///x");
  EXPECT_EQ(view.WantsHistory(), "");
  view.Take(MakeAdvice("a", 256));
  EXPECT_EQ(view.WantsHistory(), "a");
  v1::Reply reply;
  *reply.add_runs() = MakeAdvice("a", 64);
  *reply.add_runs() = MakeAdvice("a", 128);
  view.Take(MakeAdvice("a", 320));  // comes while the history is under way
  view.TakeHistory("a", reply);
  EXPECT_EQ(view.WantsHistory(), "");
  EXPECT_EQ(view.Latest()[0].scans_done(), 320u);
}

TEST(WatchView, SaysThatTheDaemonIsAway) {
  WatchView view("", "ipc:///x");
  view.Take(MakeAdvice("a", 64));
  view.set_away(true);
  EXPECT_THAT(view.Draw(80, 24, {}), HasSubstr("no answer from ipc:///x"));
}

TEST(WatchView, NamesAreNeverRaw) {
  WatchView view("", "ipc:///x");
  view.Take(MakeAdvice("a\033[2J\nb", 64));
  view.Take(MakeAdvice("c", 64));
  EXPECT_THAT(view.Draw(80, 40, {}), Not(HasSubstr("\033")));
}

}  // namespace
}  // namespace lastscan::commands
