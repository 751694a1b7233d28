// The page's memory: histories in order of scans, bounded, complete, and
// everybody woken when something changed.
#include "page/run_book.h"

#include <gtest/gtest.h>

#include <thread>

#include "unit/drawing/invented_advice.h"

namespace lastscan::page {
namespace {

using std::chrono_literals::operator""ms;

TEST(RunBook, KeepsTheHistoryInOrderAndReplacesTheSameScan) {
  RunBook book;
  for (std::uint64_t scans : {64, 128, 128, 256}) {
    book.Update({test::LawfulAdvice(scans)}, 1000);
  }
  const std::vector<v1::Advice> history = book.History("night-7", 0ms);
  ASSERT_EQ(history.size(), 3u);
  EXPECT_EQ(history[0].scans_done(), 64u);
  EXPECT_EQ(history[2].scans_done(), 256u);
  EXPECT_TRUE(book.History("another", 0ms).empty());
}

TEST(RunBook, ChangesItsVersionOnlyOnNews) {
  RunBook book;
  const v1::Advice advice = test::LawfulAdvice(64);
  book.Update({advice}, 1000);
  const std::uint64_t first = book.Look().version;
  book.Update({advice}, 1001);
  EXPECT_EQ(book.Look().version, first);
  v1::Advice silent = advice;  // the same scans, another verdict
  silent.set_verdict(v1::INSPECT);
  book.Update({silent}, 1002);
  const std::uint64_t second = book.Look().version;
  EXPECT_NE(second, first);
  book.DaemonAway("no answer");
  const Shelf away = book.Look();
  EXPECT_NE(away.version, second);
  EXPECT_EQ(away.trouble, "no answer");
  EXPECT_EQ(away.answered_at, 1002);
  EXPECT_EQ(away.runs.size(), 1u) << "what was known stays to be seen";
  book.DaemonAway("no answer");
  EXPECT_EQ(book.Look().version, away.version);
  book.Update({silent}, 1003);
  EXPECT_NE(book.Look().version, away.version);
  EXPECT_EQ(book.Look().trouble, "");
}

TEST(RunBook, BoundsAHistoryAndKeepsItsEnds) {
  RunBook book;
  constexpr std::uint64_t kSnapshots = 5000;
  for (std::uint64_t scans = 1; scans <= kSnapshots; ++scans) {
    book.Update({test::LawfulAdvice(scans)}, 1000);
  }
  const std::vector<v1::Advice> history = book.History("night-7", 0ms);
  EXPECT_LE(history.size(), RunBook::kMostPoints);
  EXPECT_GE(history.size(), RunBook::kMostPoints / 2);
  EXPECT_EQ(history.front().scans_done(), 1u);
  EXPECT_EQ(history.back().scans_done(), kSnapshots);
  for (std::size_t i = 1; i < history.size(); ++i) {
    EXPECT_LT(history[i - 1].scans_done(), history[i].scans_done());
  }
}

TEST(RunBook, PutsEarlierAdviceInFront) {
  RunBook book;
  book.Update({test::LawfulAdvice(256)}, 1000);
  std::thread asker([&] {
    while (book.HistoriesWanted().empty()) {
      book.Rest(std::chrono::duration<double>(5));
    }
    EXPECT_EQ(book.HistoriesWanted(), std::vector<std::string>{"night-7"});
    book.PutHistory("night-7",
                    {test::LawfulAdvice(64), test::LawfulAdvice(128), test::LawfulAdvice(256)});
  });
  const std::vector<v1::Advice> history = book.History("night-7", 20000ms);
  asker.join();
  ASSERT_EQ(history.size(), 3u);
  EXPECT_EQ(history[0].scans_done(), 64u);
  EXPECT_TRUE(book.HistoriesWanted().empty());
}

TEST(RunBook, AsksAgainForAHistoryThatDidNotCome) {
  RunBook book;
  book.Update({test::LawfulAdvice(256)}, 1000);
  book.History("night-7", 1ms);
  EXPECT_EQ(book.HistoriesWanted().size(), 1u);
  book.DaemonAway("no answer");
  EXPECT_TRUE(book.HistoriesWanted().empty());
  book.History("night-7", 1ms);
  EXPECT_EQ(book.HistoriesWanted().size(), 1u);
}

TEST(RunBook, ForgetsRunsTheDaemonNoLongerNames) {
  RunBook book;
  book.Update({test::LawfulAdvice(64)}, 1000);
  book.Update({}, 1001);
  EXPECT_TRUE(book.Look().runs.empty());
  EXPECT_TRUE(book.History("night-7", 0ms).empty());
}

TEST(RunBook, PutsTheMostUrgentFirst) {
  RunBook book;
  std::vector<v1::Advice> runs;
  for (v1::Verdict verdict : test::AllVerdicts()) {
    v1::Advice advice = test::LawfulAdvice(64);
    advice.set_run("run " + std::to_string(verdict));
    advice.set_verdict(verdict);
    runs.push_back(advice);
  }
  book.Update(runs, 1000);
  const Shelf shelf = book.Look();
  ASSERT_EQ(shelf.runs.size(), 6u);
  EXPECT_EQ(shelf.runs.front().verdict(), v1::INSPECT);
  EXPECT_EQ(shelf.runs.back().verdict(), v1::ON_COURSE);
}

TEST(RunBook, WakesThoseWhoWait) {
  RunBook book;
  const std::uint64_t seen = book.Look().version;
  EXPECT_EQ(book.AwaitChange(seen, 1ms), seen);
  std::thread writer([&] { book.Update({test::LawfulAdvice(64)}, 1000); });
  const auto version = book.AwaitChange(seen, 20000ms);
  writer.join();
  ASSERT_TRUE(version.has_value());
  EXPECT_NE(*version, seen);
  std::thread closer([&] { book.Close(); });
  EXPECT_FALSE(book.AwaitChange(*version, 20000ms).has_value());
  closer.join();
}

}  // namespace
}  // namespace lastscan::page
