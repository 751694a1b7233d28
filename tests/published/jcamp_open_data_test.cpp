// Openly published NMR files, read by us and by a second, independent reader
// (read_jcamp.py): the same points, widths and shifts. The data are fetched by
// open_data.sh and found through LASTSCAN_OPEN_DATA.
#include <gmock/gmock.h>
#include <unistd.h>

#include <Eigen/Core>
#include <algorithm>
#include <cmath>
#include <complex>
#include <cstdio>
#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <numeric>
#include <sstream>
#include <unsupported/Eigen/FFT>

#include "formats/jcamp_dx.h"

namespace lastscan::formats {
namespace {

namespace fs = std::filesystem;
using testing::HasSubstr;

// What the second reader makes of a file.
struct SecondReading {
  std::string domain;
  std::size_t points = 0;
  double width_hz = 0;
  double centre_ppm = 0;
  std::vector<double> samples;
};

class OpenData : public testing::Test {
 protected:
  void SetUp() override {
    const char* data = std::getenv("LASTSCAN_OPEN_DATA");
    ASSERT_NE(data, nullptr) << "LASTSCAN_OPEN_DATA is not set: run tests/published/open_data.sh "
                                "FOLDER and set it to that folder (tests/run.sh does both)";
    data_ = data;
    std::string pattern = (fs::temp_directory_path() / "lastscan-published-XXXXXX").string();
    ASSERT_NE(mkdtemp(pattern.data()), nullptr);
    scratch_ = pattern;
  }
  void TearDown() override {
    if (!scratch_.empty()) fs::remove_all(scratch_);
  }

  // All data files, wherever they lie below the folder, in a fixed order.
  std::vector<std::string> Files() const {
    std::vector<std::string> files;
    for (const auto& entry : fs::recursive_directory_iterator(data_)) {
      const std::string ending = entry.path().extension().string();
      if (ending == ".dx" || ending == ".jdx") files.push_back(entry.path().string());
    }
    std::sort(files.begin(), files.end());
    return files;
  }

  SecondReading ReadByPython(const std::string& path) const {
    const std::string out = (scratch_ / "samples").string();
    const std::string command = "/usr/bin/python3 '" LASTSCAN_SOURCE_DIR
                                "/tests/published/read_jcamp.py' '" +
                                path + "' '" + out + "'";
    FILE* pipe = popen(command.c_str(), "r");
    char line[256] = "";
    const bool any = pipe != nullptr && std::fgets(line, sizeof line, pipe) != nullptr;
    const int status = pipe != nullptr ? pclose(pipe) : -1;
    EXPECT_TRUE(any && status == 0) << "the second reader failed on " << path;
    SecondReading reading;
    std::istringstream(line) >> reading.domain >> reading.points >> reading.width_hz >>
        reading.centre_ppm;
    std::ifstream file(out, std::ios::binary);
    for (double sample = 0; file.read(reinterpret_cast<char*>(&sample), sizeof sample);) {
      reading.samples.push_back(sample);
    }
    return reading;
  }

  void ExpectSame(const Recording& ours, const SecondReading& other) const {
    const v1::Snapshot& snapshot = ours.snapshot;
    EXPECT_EQ(other.domain, snapshot.domain() == v1::FID ? "FID" : "SPECTRUM");
    EXPECT_EQ(snapshot.points(), other.points);
    EXPECT_NEAR(snapshot.spectral_width_hz(), other.width_hz, 1e-9 * other.width_hz);
    EXPECT_NEAR(snapshot.centre_shift_ppm(), other.centre_ppm, 1e-9);
    // Whole numbers times a factor: no rounding may differ.
    EXPECT_TRUE(ours.samples == other.samples);
  }

  fs::path data_;
  fs::path scratch_;
};

TEST_F(OpenData, AllOneDimensionalFilesReadTheSameTwice) {
  int read = 0;
  int two_dimensional = 0;
  for (const std::string& path : Files()) {
    SCOPED_TRACE(path);
    Recording recording;
    try {
      recording = ReadRecording(path);
    } catch (const Unreadable& refusal) {
      EXPECT_THAT(refusal.what(), HasSubstr("data of two or more dimensions"));
      ++two_dimensional;
      continue;
    }
    ++read;
    ASSERT_TRUE(recording.has_centre_shift);
    ExpectSame(recording, ReadByPython(path));
  }
  EXPECT_EQ(read, 7);
  EXPECT_EQ(two_dimensional, 3);
}

// The facts as they stand in the files themselves.
TEST_F(OpenData, FactsAreThoseStatedInTheFiles) {
  const Recording fid = ReadRecording((data_ / "aspirin-1h.fid.dx").string());
  EXPECT_EQ(fid.snapshot.points(), 8192u);
  EXPECT_EQ(fid.snapshot.scans_done(), 32u);
  EXPECT_EQ(fid.snapshot.nucleus(), "1H");
  EXPECT_EQ(fid.snapshot.observe_frequency_mhz(), 300.132250975);
  EXPECT_NEAR(fid.snapshot.spectral_width_hz(), 1 / 0.0002088, 1e-6);
  EXPECT_EQ(fid.solvent, "CDCl3");
  EXPECT_EQ(fid.snapshot.recorded_at().seconds(), 1138699492);  // 2006-01-31 09:24:52 UTC
  // FIRST= and LAST= of the real and the imaginary page.
  EXPECT_EQ(fid.samples.front(), 0);
  EXPECT_EQ(fid.samples[fid.samples.size() - 2], 4422);
  EXPECT_EQ(fid.samples.back(), -2326);
  const Recording spectrum = ReadRecording((data_ / "aspirin-1h.dx").string());
  EXPECT_EQ(spectrum.samples.front(), -118793);
  EXPECT_EQ(spectrum.samples.back(), -78595);
  EXPECT_EQ(*std::max_element(spectrum.samples.begin(), spectrum.samples.end()), 440519097);
}

double Correlation(const std::vector<double>& a, const std::vector<double>& b) {
  const Eigen::Map<const Eigen::ArrayXd> x(a.data(), static_cast<Eigen::Index>(a.size()));
  const Eigen::Map<const Eigen::ArrayXd> y(b.data(), static_cast<Eigen::Index>(b.size()));
  const Eigen::ArrayXd dx = x - x.mean();
  const Eigen::ArrayXd dy = y - y.mean();
  return (dx * dy).sum() / std::sqrt(dx.square().sum() * dy.square().sum());
}

// Magnitudes of the zero-filled transform in the order of a spectrum file: zero
// frequency at bin points / 2, the highest frequency first.
std::vector<double> Magnitudes(const Recording& fid, bool reversed, std::size_t points) {
  std::vector<std::complex<double>> time(points);
  for (std::size_t i = 0; i < fid.snapshot.points(); ++i) {
    time[i] = {fid.samples[2 * i], (reversed ? -1 : 1) * fid.samples[2 * i + 1]};
  }
  std::vector<std::complex<double>> bins;
  Eigen::FFT<double>().fwd(bins, time);
  std::vector<double> magnitudes(points);
  for (std::size_t k = 0; k < points; ++k) {
    magnitudes[(points + points / 2 - k) % points] = std::abs(bins[k]);
  }
  return magnitudes;
}

// The sense of an FID that jcamp_dx.h promises, and the place of its shift
// reference: the FID, transformed, is the spectrum of the file beside it.
TEST_F(OpenData, FidsTransformIntoTheirSpectra) {
  for (const std::string name : {"aspirin-1h", "naphtoicAcid-1h"}) {
    SCOPED_TRACE(name);
    const Recording fid = ReadRecording((data_ / (name + ".fid.dx")).string());
    const Recording spectrum = ReadRecording((data_ / (name + ".dx")).string());
    const std::size_t points = spectrum.samples.size();
    const std::vector<double> magnitudes = Magnitudes(fid, fid.snapshot.reversed(), points);
    // The spectrum is real and phased, ours a magnitude with wider feet.
    EXPECT_GT(Correlation(magnitudes, spectrum.samples), 0.9);
    EXPECT_LT(Correlation(Magnitudes(fid, !fid.snapshot.reversed(), points), spectrum.samples),
              0.1);
    // The strongest line has the same shift by either file's own facts.
    const auto strongest = [](const std::vector<double>& v) {
      return static_cast<double>(std::max_element(v.begin(), v.end()) - v.begin());
    };
    const double count = static_cast<double>(points);
    const double bin =
        spectrum.snapshot.spectral_width_hz() / count / spectrum.snapshot.observe_frequency_mhz();
    const double from_fid =
        fid.snapshot.centre_shift_ppm() + (count / 2 - strongest(magnitudes)) * bin;
    const double from_spectrum = spectrum.snapshot.centre_shift_ppm() +
                                 ((count - 1) / 2 - strongest(spectrum.samples)) * bin;
    EXPECT_NEAR(from_fid, from_spectrum, 1.5 * bin);
  }
}

// What we write, the second reader reads alike, in both forms.
TEST_F(OpenData, WrittenFilesReadTheSameTwice) {
  for (const std::string& path : Files()) {
    SCOPED_TRACE(path);
    Recording recording;
    try {
      recording = ReadRecording(path);
    } catch (const Unreadable&) {
      continue;  // two dimensions: told apart above
    }
    for (TableForm form : {TableForm::kAffn, TableForm::kDifdup}) {
      const std::string written = (scratch_ / "written.dx").string();
      {
        std::ofstream out(written, std::ios::binary);
        WriteJcampDx(out, recording, form);
      }
      const Recording again = ReadRecording(written);
      ExpectSame(again, ReadByPython(written));
      ASSERT_EQ(again.samples.size(), recording.samples.size());
      double worst = 0;
      double largest = 0;
      for (std::size_t i = 0; i < again.samples.size(); ++i) {
        worst = std::max(worst, std::abs(again.samples[i] - recording.samples[i]));
        largest = std::max(largest, std::abs(recording.samples[i]));
      }
      EXPECT_LE(worst, largest * 0x1p-31);
    }
  }
}

}  // namespace
}  // namespace lastscan::formats
