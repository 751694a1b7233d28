// The follower's memory, over restarts, crashes and strange names.
#include "commands/follow_journal.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <stdlib.h>

#include <filesystem>
#include <fstream>
#include <optional>

#include "commands/command.h"

namespace lastscan::commands {
namespace {

namespace fs = std::filesystem;
using ::testing::HasSubstr;
using ::testing::ThrowsMessage;

class Journal : public ::testing::Test {
 protected:
  void SetUp() override {
    std::string name = (fs::temp_directory_path() / "lastscan-journal-XXXXXX").string();
    ASSERT_NE(mkdtemp(name.data()), nullptr);
    folder_ = name;
  }
  void TearDown() override { fs::remove_all(folder_); }

  std::string Write(const std::string& name, const std::string& text) {
    const std::string path = (folder_ / name).string();
    std::ofstream(path, std::ios::binary) << text;
    return path;
  }
  FollowJournal& Open(const std::string& endpoint = "ipc:///x") {
    journal_.reset();
    return journal_.emplace((folder_ / "state").string(), folder_.string(), endpoint);
  }

  fs::path folder_;
  std::optional<FollowJournal> journal_;
};

TEST_F(Journal, RemembersOverARestart) {
  const std::string path = Write("a.jdx", "data");
  const FileState state = StateOf(path);
  EXPECT_EQ(state.size, 4u);
  const std::uint64_t print = Fingerprint("night", path);
  EXPECT_FALSE(Open().Holds(print));
  journal_->Add("night", path, state, print);
  EXPECT_TRUE(journal_->Holds(print));
  Open();
  EXPECT_TRUE(journal_->Holds(print));
  EXPECT_TRUE(journal_->HoldsUnchanged("night", path, state));
  EXPECT_FALSE(journal_->HoldsUnchanged("other", path, state));
  EXPECT_FALSE(journal_->HoldsUnchanged("night", path, {5, state.changed_ns}));
}

TEST_F(Journal, AnotherDaemonHasAnotherJournal) {
  Open("ipc:///x").Add("night", "a", {1, 2}, 3);
  EXPECT_FALSE(Open("ipc:///y").Holds(3));
  EXPECT_TRUE(Open("ipc:///x").Holds(3));
}

TEST_F(Journal, FingerprintSeesContentAndRun) {
  const std::string a = Write("a.jdx", "data");
  const std::string copy = Write("b.jdx", "data");
  const std::string other = Write("c.jdx", "dat4");
  EXPECT_EQ(Fingerprint("night", a), Fingerprint("night", copy));
  EXPECT_NE(Fingerprint("night", a), Fingerprint("night", other));
  EXPECT_NE(Fingerprint("night", a), Fingerprint("day", a));
  // The published value of 64-bit FNV-1a for "foobar" is 85944171f73967e8; the
  // run's name goes in first with a closing zero, so the whole is computed apart:
  // python3: h=0xcbf29ce484222325; for b in b"night\0data": h=((h^b)*0x100000001b3)%2**64
  std::uint64_t expected = 0xcbf29ce484222325u;
  for (const char c : std::string("night\0data", 10)) {
    expected = (expected ^ static_cast<unsigned char>(c)) * 0x100000001b3u;
  }
  EXPECT_EQ(Fingerprint("night", a), expected);
  EXPECT_THROW(Fingerprint("night", (folder_ / "missing").string()), Failure);
}

TEST_F(Journal, KeepsStrangeNames) {
  const std::string name = "tab\there \\ and\nnewline \xc3\xa9";
  Open().Add("run\tx", name, {1, 2}, 3);
  EXPECT_TRUE(Open().HoldsUnchanged("run\tx", name, {1, 2}));
}

TEST_F(Journal, ALineCutOffByACrashCostsOnlyItself) {
  Open().Add("night", "a", {1, 2}, 0xabc);
  journal_->Add("night", "b", {3, 4}, 0xdef);
  const std::string path = journal_->path();
  journal_.reset();
  fs::resize_file(path, fs::file_size(path) - 5);
  Open();
  EXPECT_TRUE(journal_->Holds(0xabc));
  EXPECT_FALSE(journal_->Holds(0xdef));
  journal_->Add("night", "c", {5, 6}, 0x123);
  Open();
  EXPECT_TRUE(journal_->Holds(0xabc));
  EXPECT_TRUE(journal_->Holds(0x123));
}

TEST_F(Journal, ACutFirstLineIsANewJournal) {
  const std::string path = Open().path();
  journal_.reset();
  fs::resize_file(path, 7);
  Open().Add("night", "a", {1, 2}, 9);
  EXPECT_TRUE(Open().Holds(9));
}

TEST_F(Journal, RefusesANewerJournalAndLeavesIt) {
  const std::string path = Open().path();
  journal_.reset();
  std::ofstream(path) << "lastscan follow journal 2\nsomething\n";
  const auto size = fs::file_size(path);
  EXPECT_THAT([&] { Open(); }, ThrowsMessage<Failure>(HasSubstr(path)));
  EXPECT_EQ(fs::file_size(path), size);
}

TEST_F(Journal, OneFollowerForAFolder) {
  Open();
  EXPECT_THAT([&] { FollowJournal((folder_ / "state").string(), folder_.string(), "ipc:///x"); },
              ThrowsMessage<Failure>(HasSubstr("followed by another")));
}

TEST_F(Journal, AFolderThatCannotBeMadeIsNamed) {
  const std::string file = Write("state", "a file where the folder should be");
  EXPECT_THAT([&] { Open(); }, ThrowsMessage<Failure>(HasSubstr(file)));
}

}  // namespace
}  // namespace lastscan::commands
