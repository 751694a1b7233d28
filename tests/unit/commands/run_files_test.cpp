// Which files a command line names, which run each belongs to, and their order.
#include "commands/run_files.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>
#include <stdlib.h>

#include <filesystem>
#include <fstream>

#include "commands/command.h"
#include "formats/jcamp_dx.h"
#include "rehearsal/invented_run.h"

namespace lastscan::commands {
namespace {

namespace fs = std::filesystem;
using ::testing::HasSubstr;
using ::testing::ThrowsMessage;

class RunFiles : public ::testing::Test {
 protected:
  void SetUp() override {
    std::string name = (fs::temp_directory_path() / "lastscan-files-XXXXXX").string();
    ASSERT_NE(mkdtemp(name.data()), nullptr);
    folder_ = name;
  }
  void TearDown() override { fs::remove_all(folder_); }

  std::string Write(const std::string& name, const std::string& text) {
    const fs::path path = folder_ / name;
    fs::create_directories(path.parent_path());
    std::ofstream(path) << text;
    return path.string();
  }

  std::string WriteLook(const std::string& name, std::uint64_t scans) {
    rehearsal::InventedSample sample;
    sample.points = 256;
    sample.lines = {{100, 5, 1, 0}};
    const fs::path path = folder_ / name;
    fs::create_directories(path.parent_path());
    std::ofstream file(path);
    formats::WriteJcampDx(file, rehearsal::InventedRun(sample, 1).AdvanceTo(scans));
    return path.string();
  }

  fs::path folder_;
};

TEST_F(RunFiles, AFolderIsARunAndItsFilesAreItsSnapshots) {
  Write("night/b.jdx", "x");
  Write("night/a.jdx", "x");
  Write("night/.hidden", "x");
  Write("night/c.jdx.part", "x");
  Write("night/c.jdx~", "x");
  Write("night/deeper/d.jdx", "x");
  const auto files = FindRunFiles({(folder_ / "night").string()});
  ASSERT_EQ(files.size(), 2u);
  EXPECT_THAT(files[0].path, HasSubstr("a.jdx"));
  EXPECT_EQ(files[0].run, "night");
  EXPECT_EQ(files[1].run, "night");
  EXPECT_EQ(RunNameOf((folder_ / "night/").string()), "night");
  EXPECT_EQ(RunNameOf((folder_ / "night/a.jdx").string()), "night");
}

TEST_F(RunFiles, SortsByRunAndScans) {
  // Names and scans in opposite orders: the scans decide.
  WriteLook("one/a.jdx", 128);
  WriteLook("one/b.jdx", 64);
  WriteLook("two/a.jdx", 32);
  FileComplaints complaints;
  const auto files =
      ReadRunFiles(FindRunFiles({(folder_ / "two").string(), (folder_ / "one").string()}),
                   GoalOptions(), SnapshotOptions(), complaints);
  EXPECT_FALSE(complaints.any());
  ASSERT_EQ(files.size(), 3u);
  EXPECT_EQ(files[0].recording.snapshot.scans_done(), 64u);
  EXPECT_EQ(files[1].recording.snapshot.scans_done(), 128u);
  EXPECT_EQ(files[2].recording.snapshot.run(), "two");
}

TEST_F(RunFiles, UnreadableFilesAreLeftOutAndSaid) {
  WriteLook("night/a.jdx", 64);
  const std::string bad = Write("night/notes.txt", "a letter\n");
  FileComplaints complaints;
  ::testing::internal::CaptureStderr();
  const auto files = ReadRunFiles(FindRunFiles({(folder_ / "night").string()}), GoalOptions(),
                                  SnapshotOptions(), complaints);
  EXPECT_THAT(::testing::internal::GetCapturedStderr(), HasSubstr(bad));
  EXPECT_TRUE(complaints.any());
  EXPECT_EQ(files.size(), 1u);
}

TEST_F(RunFiles, TheSameReasonIsSaidOnce) {
  FileComplaints complaints;
  ::testing::internal::CaptureStderr();
  complaints.Add("a.jdx", "the window lies outside");
  complaints.Add("b.jdx", "the window lies outside");
  complaints.Add("c.jdx", "the window lies outside");
  complaints.Close();
  EXPECT_EQ(::testing::internal::GetCapturedStderr(),
            "lastscan: a.jdx: the window lies outside\n"
            "lastscan: 2 more files were left out for reasons given above\n");
}

TEST_F(RunFiles, DroppedSamplesComeBackAsTheyWere) {
  const std::string path = WriteLook("night/a.jdx", 64);
  FileComplaints complaints;
  auto files = ReadRunFiles(FindRunFiles({path}), GoalOptions(), SnapshotOptions(), complaints);
  ASSERT_EQ(files.size(), 1u);
  const std::vector<double> samples = files[0].recording.samples;
  ASSERT_FALSE(samples.empty());
  files[0].recording.samples.clear();
  files[0].recording.snapshot.set_final(true);
  EnsureSamples(files[0], GoalOptions(), SnapshotOptions());
  EXPECT_EQ(files[0].recording.samples, samples);
  EXPECT_TRUE(files[0].recording.snapshot.final());
}

TEST_F(RunFiles, UndatedFilesOfARunAreStampedAlikeAndAlwaysTheSame) {
  std::vector<RunFile> files(3);
  for (std::size_t i = 0; i < files.size(); ++i) {
    files[i].path = Write("night/" + std::to_string(i), "x");
    files[i].recording.snapshot.set_run("night");
    fs::last_write_time(files[i].path, fs::file_time_type::clock::now() - std::chrono::hours(i));
  }
  files[1].recording.snapshot.mutable_recorded_at()->set_seconds(1234);
  StampUndated(files);
  EXPECT_EQ(files[1].recording.snapshot.recorded_at().seconds(), 1234);
  const auto oldest = ChangedAt(StateOf(files[2].path));
  EXPECT_EQ(files[0].recording.snapshot.recorded_at().SerializeAsString(),
            oldest.SerializeAsString());
  EXPECT_EQ(files[2].recording.snapshot.recorded_at().SerializeAsString(),
            oldest.SerializeAsString());
}

TEST_F(RunFiles, RefusesWhatIsNotThere) {
  EXPECT_THAT([&] { FindRunFiles({(folder_ / "missing").string()}); },
              ThrowsMessage<Failure>(HasSubstr("missing")));
  EXPECT_THAT([&] { FindRunFiles({folder_.string()}); },
              ThrowsMessage<Failure>(HasSubstr("no files")));
}

}  // namespace
}  // namespace lastscan::commands
