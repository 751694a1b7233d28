// Files as such: told by content, refused with one clear line; facts a run needs.
#include "formats/recording.h"

#include <gmock/gmock.h>
#include <sys/stat.h>
#include <unistd.h>

#include <cstring>
#include <filesystem>
#include <fstream>

#include "sample_text.h"

namespace lastscan::formats {
namespace {

namespace fs = std::filesystem;
using testing::HasSubstr;

class RecordingFile : public testing::Test {
 protected:
  void SetUp() override {
    std::string pattern = (fs::temp_directory_path() / "lastscan-formats-XXXXXX").string();
    ASSERT_NE(mkdtemp(pattern.data()), nullptr);
    folder_ = pattern;
  }
  void TearDown() override { fs::remove_all(folder_); }

  std::string Write(const std::string& contents) {
    const std::string path = (folder_ / "data").string();
    std::ofstream(path, std::ios::binary) << contents;
    return path;
  }
  static std::string Refused(const std::string& path, std::size_t largest = 1 << 20) {
    const std::string message = RefusalOf([&] { ReadRecording(path, largest); });
    EXPECT_EQ(message.find('\n'), message.npos);
    EXPECT_THAT(message, HasSubstr(path));
    return message;
  }

  fs::path folder_;
};

TEST_F(RecordingFile, IsToldByContent) {
  EXPECT_EQ(ReadRecording(Write(SpectrumText().str())).samples.size(), 5u);
  EXPECT_EQ(ReadRecording(Write(FidText().str())).snapshot.points(), 4u);
}

TEST_F(RecordingFile, IsRefusedInOneLine) {
  EXPECT_THAT(Refused((folder_ / "none").string()), HasSubstr("there is no such file"));
  EXPECT_THAT(Refused(folder_.string()), HasSubstr("is a folder"));
  EXPECT_THAT(Refused(Write("")), HasSubstr("is empty"));
  EXPECT_THAT(Refused(Write(std::string("\x7F"
                                        "ELF\0\0\1",
                                        7))),
              HasSubstr("holds binary data"));
  EXPECT_THAT(Refused(Write("shift;height\n1;2\n")), HasSubstr("is not JCAMP-DX"));
  const std::string whole = SpectrumText().str();
  EXPECT_THAT(Refused(Write(whole.substr(0, whole.size() - 8))), HasSubstr("truncated"));
}

TEST_F(RecordingFile, ThatNeverEndsIsNotOpened) {
  const std::string path = (folder_ / "pipe").string();
  ASSERT_EQ(mkfifo(path.c_str(), 0600), 0);
  EXPECT_THAT(Refused(path), HasSubstr("is not a regular file"));
}

TEST_F(RecordingFile, ThatIsTooLargeIsRefusedUnread) {
  const std::string path = Write(SpectrumText().str());
  fs::resize_file(path, std::uintmax_t{500} << 20);  // sparse: takes no room
  EXPECT_THAT(RefusalOf([&] { ReadRecording(path); }),
              HasSubstr("524288000 bytes are more than the 268435456 that are read"));
  EXPECT_THAT(Refused(Write(SpectrumText().str()), 100), HasSubstr("more than the 100"));
}

TEST_F(RecordingFile, WithoutRightsIsNamed) {
  const std::string path = Write(SpectrumText().str());
  if (geteuid() == 0) GTEST_SKIP() << "the administrator may read everything";
  fs::permissions(path, fs::perms::none);
  EXPECT_THAT(Refused(path), HasSubstr("cannot be opened"));
}

TEST(Frame, IsTheSamplesAsTheyLieInMemory) {
  const std::vector<double> samples = {1.5, -2};
  const std::string_view frame = AsFrame(samples);
  ASSERT_EQ(frame.size(), 16u);
  double second = 0;
  std::memcpy(&second, frame.data() + 8, 8);
  EXPECT_EQ(second, -2);
}

TEST(Facts, ThatARunNeedsAreNamedWithTheirOption) {
  Recording recording;
  v1::Snapshot& snapshot = recording.snapshot;
  const auto refused = [&] { return RefusalOf([&] { RequireFacts(recording, "a.dx"); }); };
  EXPECT_THAT(refused(), HasSubstr("a.dx: does not state the nucleus"));
  EXPECT_THAT(refused(), HasSubstr("--nucleus NAME"));
  snapshot.set_nucleus("13C");
  EXPECT_THAT(refused(), HasSubstr("--observe-frequency MHZ"));
  snapshot.set_observe_frequency_mhz(100);
  EXPECT_THAT(refused(), HasSubstr("the spectral width"));
  snapshot.set_spectral_width_hz(20000);
  EXPECT_THAT(refused(), HasSubstr("--scans-done N"));
  snapshot.set_scans_done(8);
  EXPECT_THAT(refused(), HasSubstr("--centre-shift PPM"));
  recording.has_centre_shift = true;
  EXPECT_EQ(refused(), "");
}

}  // namespace
}  // namespace lastscan::formats
