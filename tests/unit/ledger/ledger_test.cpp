// The ledger: what is committed is found again, also by the next process; what is
// not ours or newer is left alone.
#include "ledger/ledger.h"

#include <SQLiteCpp/Database.h>
#include <SQLiteCpp/Exception.h>
#include <google/protobuf/util/message_differencer.h>
#include <gtest/gtest.h>
#include <sys/stat.h>

#include <filesystem>
#include <fstream>
#include <iterator>
#include <string>

#include "ledger/record.h"
#include "made_up.h"

namespace lastscan::ledger {
namespace {

using google::protobuf::util::MessageDifferencer;

class LedgerTest : public ::testing::Test {
 protected:
  void SetUp() override {
    std::string name = ::testing::TempDir() + "/ledger-XXXXXX";
    ASSERT_NE(::mkdtemp(name.data()), nullptr);
    folder_ = name;
    path_ = (folder_ / "deep" / "ledger.sqlite").string();
  }
  void TearDown() override { std::filesystem::remove_all(folder_); }

  // Adds one snapshot of `run` after `scans` scans and returns its advice.
  v1::Advice Add(Ledger& book, v1::RunRecord& record, std::uint64_t scans, bool final = false) {
    v1::Snapshot snapshot = MadeUpSnapshot(record.run(), scans);
    snapshot.set_final(final);
    const v1::Advice advice = MadeUpAdvice(snapshot, v1::ON_COURSE);
    AddToRecord(snapshot, advice, &record);
    book.AddSnapshot({.record = &record,
                      .advice = &advice,
                      .state = "state after " + std::to_string(scans),
                      .fingerprint = "print " + std::to_string(scans),
                      .arrived_at = kFirstArrival + static_cast<double>(scans)});
    return advice;
  }

  std::string Bytes() const {
    std::ifstream file(path_, std::ios::binary);
    return {std::istreambuf_iterator<char>(file), {}};
  }

  std::string ErrorOfOpening() const {
    try {
      Ledger book(path_);
    } catch (const LedgerError& error) {
      return error.what();
    }
    return "";
  }

  static constexpr double kFirstArrival = 1'900'000'000;
  std::filesystem::path folder_;
  std::string path_;
};

TEST_F(LedgerTest, KeepsEverythingForTheNextProcess) {
  v1::RunRecord record = RecordOf("night 1");
  v1::Advice first, second;
  {
    Ledger book(path_);
    first = Add(book, record, 100);
    second = Add(book, record, 300);
  }
  Ledger book(path_);
  EXPECT_EQ(book.State("night 1"), "state after 300");
  ASSERT_TRUE(book.AdviceGiven("night 1", 100, "print 100"));
  EXPECT_TRUE(MessageDifferencer::Equals(*book.AdviceGiven("night 1", 100, "print 100"), first));
  EXPECT_TRUE(MessageDifferencer::Equals(*book.LatestAdvice("night 1"), second));
  ASSERT_TRUE(book.Record("night 1"));
  EXPECT_TRUE(MessageDifferencer::Equivalent(*book.Record("night 1"), record))
      << book.Record("night 1")->DebugString() << record.DebugString();
}

TEST_F(LedgerTest, KnowsASnapshotByRunScansAndFingerprintTogether) {
  Ledger book(path_);
  v1::RunRecord record = RecordOf("a");
  Add(book, record, 100);
  EXPECT_TRUE(book.AdviceGiven("a", 100, "print 100"));
  EXPECT_FALSE(book.AdviceGiven("b", 100, "print 100"));
  EXPECT_FALSE(book.AdviceGiven("a", 101, "print 100"));
  EXPECT_FALSE(book.AdviceGiven("a", 100, "print 101"));
}

TEST_F(LedgerTest, OwnerAloneMayRead) {
  Ledger book(path_);
  struct stat status {};
  ASSERT_EQ(::stat(path_.c_str(), &status), 0);
  EXPECT_EQ(status.st_mode & 0777, 0600U);
  ASSERT_EQ(::stat((folder_ / "deep").c_str(), &status), 0);
  EXPECT_EQ(status.st_mode & 0777, 0700U);
}

TEST_F(LedgerTest, WritesThroughToTheDisk) {
  { Ledger book(path_); }
  SQLite::Database database(path_, SQLite::OPEN_READWRITE);
  EXPECT_EQ(database.execAndGet("PRAGMA journal_mode").getString(), "wal");
  EXPECT_EQ(database.execAndGet("PRAGMA user_version").getUInt(), kLedgerVersion);
}

TEST_F(LedgerTest, ACommitThatFailsChangesNothing) {
  Ledger book(path_);
  v1::RunRecord record = RecordOf("a");
  Add(book, record, 100);
  const v1::RunRecord before = *book.Record("a");
  // As many scans once more break the key of the table, after the record was written.
  v1::RunRecord changed = before;
  changed.set_seconds_saved(12345);
  const v1::Advice advice = MadeUpAdvice(MadeUpSnapshot("a", 100), v1::ENOUGH);
  EXPECT_THROW(book.AddSnapshot({.record = &changed,
                                 .advice = &advice,
                                 .state = "other",
                                 .fingerprint = "other",
                                 .arrived_at = kFirstArrival}),
               LedgerError);
  EXPECT_TRUE(MessageDifferencer::Equals(*book.Record("a"), before));
  EXPECT_EQ(book.State("a"), "state after 100");
  EXPECT_NE(book.LatestAdvice("a")->verdict(), v1::ENOUGH);
}

TEST_F(LedgerTest, WaitsForNoOtherWriterForEver) {
  Ledger book(path_);
  v1::RunRecord record = RecordOf("a");
  SQLite::Database other(path_, SQLite::OPEN_READWRITE);
  other.exec("BEGIN IMMEDIATE");
  EXPECT_THROW(Add(book, record, 100), LedgerError);
  other.exec("ROLLBACK");
  EXPECT_FALSE(book.Record("a"));
  record = RecordOf("a");
  Add(book, record, 100);
  EXPECT_TRUE(book.Record("a"));
}

TEST_F(LedgerTest, RefusesANewerLedgerAndLeavesItAlone) {
  { Ledger book(path_); }
  {
    SQLite::Database database(path_, SQLite::OPEN_READWRITE);
    database.exec("PRAGMA user_version=" + std::to_string(kLedgerVersion + 1));
    database.exec("PRAGMA wal_checkpoint(TRUNCATE)");
  }
  const std::string before = Bytes();
  const std::string error = ErrorOfOpening();
  EXPECT_NE(error.find("of version 2, this program knows up to 1"), std::string::npos) << error;
  EXPECT_NE(error.find(path_), std::string::npos);
  EXPECT_EQ(Bytes(), before);
}

TEST_F(LedgerTest, RefusesANewerLedgerWhoseVersionIsStillInItsLog) {
  { Ledger book(path_); }
  SQLite::Database database(path_, SQLite::OPEN_READWRITE);
  database.exec("PRAGMA user_version=" + std::to_string(kLedgerVersion + 1));
  EXPECT_NE(ErrorOfOpening().find("of version 2"), std::string::npos) << ErrorOfOpening();
}

TEST_F(LedgerTest, RefusesAnotherProgramsFiles) {
  std::filesystem::create_directories(folder_ / "deep");
  {
    SQLite::Database database(path_, SQLite::OPEN_READWRITE | SQLite::OPEN_CREATE);
    database.exec("CREATE TABLE things (thing TEXT)");
  }
  std::string before = Bytes();
  EXPECT_NE(ErrorOfOpening().find("belongs to another program"), std::string::npos);
  EXPECT_EQ(Bytes(), before);
  std::ofstream(path_, std::ios::trunc) << "no database at all, but a text of a certain length, "
                                           "so that it could well have been a header of one.....";
  before = Bytes();
  EXPECT_NE(ErrorOfOpening().find("belongs to another program"), std::string::npos);
  EXPECT_EQ(Bytes(), before);
  std::filesystem::remove(path_);
  std::filesystem::create_directory(path_);
  EXPECT_NE(ErrorOfOpening().find("is not a file"), std::string::npos);
}

TEST_F(LedgerTest, OpensAnEmptyFile) {
  std::filesystem::create_directories(folder_ / "deep");
  std::ofstream(path_).close();
  Ledger book(path_);
  v1::RunRecord record = RecordOf("a");
  Add(book, record, 100);
  EXPECT_TRUE(book.Record("a"));
}

TEST_F(LedgerTest, RefusesASecondUser) {
  Ledger book(path_);
  EXPECT_NE(ErrorOfOpening().find("in use by another lastscand"), std::string::npos);
}

TEST_F(LedgerTest, ThinsAHistoryEvenlyAndKeepsItsEnds) {
  Ledger book(path_);
  v1::RunRecord record = RecordOf("a");
  for (std::uint64_t look = 1; look <= 101; ++look) Add(book, record, 10 * look);
  const auto scans = [&](std::size_t most) {
    std::vector<std::uint64_t> counts;
    for (const v1::Advice& advice : book.History("a", most)) counts.push_back(advice.scans_done());
    return counts;
  };
  EXPECT_EQ(scans(5), (std::vector<std::uint64_t>{10, 260, 510, 760, 1010}));
  EXPECT_EQ(scans(2), (std::vector<std::uint64_t>{10, 1010}));
  EXPECT_EQ(scans(1), (std::vector<std::uint64_t>{1010}));
  EXPECT_EQ(scans(0).size(), 0U);
  EXPECT_EQ(scans(1000).size(), 101U);
  EXPECT_EQ(book.History("unknown", 10).size(), 0U);
}

TEST_F(LedgerTest, AnAdviceWithoutSnapshotClosesTheHistory) {
  Ledger book(path_);
  v1::RunRecord record = RecordOf("a");
  Add(book, record, 100);
  v1::Advice silent = Add(book, record, 200);
  silent.set_verdict(v1::INSPECT);
  AddVerdict(silent, record.last_at(), &record);
  book.AddAdvice(record, silent);
  EXPECT_EQ(book.LatestAdvice("a")->verdict(), v1::INSPECT);
  EXPECT_EQ(book.History("a", 10).back().verdict(), v1::INSPECT);
  EXPECT_EQ(book.State("a"), "state after 200");
  // The snapshot itself is still answered as it was then.
  EXPECT_EQ(book.AdviceGiven("a", 200, "print 200")->verdict(), v1::ON_COURSE);
}

TEST_F(LedgerTest, ListsTheNewestFirstAndOpenRunsAlone) {
  Ledger book(path_);
  v1::RunRecord old = RecordOf("old"), ended = RecordOf("ended"), open = RecordOf("open");
  Add(book, old, 10);
  Add(book, ended, 2000, true);
  Add(book, open, 1000);
  Add(book, open, 1060);
  const auto names = [](const std::vector<v1::Advice>& advices) {
    std::string text;
    for (const v1::Advice& advice : advices) text += advice.run() + " ";
    return text;
  };
  EXPECT_EQ(names(book.LatestAdvices(false, 0, 100)), "ended open old ");
  EXPECT_EQ(names(book.LatestAdvices(false, 0, 2)), "ended open ");
  EXPECT_EQ(names(book.LatestAdvices(true, kFirstArrival + 500, 100)), "open ");
  const std::vector<OpenRun> runs = book.OpenRuns(kFirstArrival + 500, 8);
  ASSERT_EQ(runs.size(), 1U);
  EXPECT_EQ(runs[0].record.run(), "open");
  ASSERT_EQ(runs[0].intervals_s.size(), 1U);
  // MadeUpSnapshot: a scan takes 2.5 s.
  EXPECT_DOUBLE_EQ(runs[0].intervals_s[0], 60 * 2.5);
}

TEST_F(LedgerTest, FiltersRecords) {
  Ledger book(path_);
  v1::RunRecord first = RecordOf("a"), second = RecordOf("b");
  Add(book, first, 10);
  Add(book, second, 20);
  const auto count = [&](const std::string& instrument, const std::string& nucleus,
                         const std::string& sample, unsigned limit) {
    v1::ReadLedger filter;
    filter.set_instrument(instrument);
    filter.set_nucleus(nucleus);
    filter.set_sample(sample);
    filter.set_limit(limit);
    return book.Records(filter).size();
  };
  EXPECT_EQ(count("", "", "", 0), 2U);
  EXPECT_EQ(count("", "", "", 1), 1U);
  EXPECT_EQ(count("bench-1", "13C", "sample of b", 0), 1U);
  EXPECT_EQ(count("bench-2", "", "", 0), 0U);
  EXPECT_EQ(count("", "1H", "", 0), 0U);
  // A quotation mark is a letter like any other.
  EXPECT_EQ(count("' OR 1=1 --", "", "", 0), 0U);
}

TEST_F(LedgerTest, DropsOldStatesButNoRecords) {
  Ledger book(path_);
  v1::RunRecord old = RecordOf("old"), young = RecordOf("young");
  Add(book, old, 10);
  Add(book, young, 2000);
  EXPECT_EQ(book.DropStates(kFirstArrival + 1000), 1);
  EXPECT_FALSE(book.State("old"));
  EXPECT_TRUE(book.State("young"));
  EXPECT_TRUE(book.Record("old"));
}

}  // namespace
}  // namespace lastscan::ledger
