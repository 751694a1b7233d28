// What is written reads back: facts, samples to the promised precision, both forms.
#include <gmock/gmock.h>

#include <cmath>
#include <limits>
#include <random>
#include <sstream>

#include "engine/advice/cautions.h"
#include "formats/jcamp_dx.h"
#include "sample_text.h"

namespace lastscan::formats {
namespace {

using testing::HasSubstr;

std::string Written(const Recording& recording, TableForm form = TableForm::kDifdup) {
  std::ostringstream out;
  WriteJcampDx(out, recording, form);
  return out.str();
}

Recording Fid(std::vector<double> samples) {
  Recording recording;
  v1::Snapshot& snapshot = recording.snapshot;
  snapshot.set_domain(v1::FID);
  snapshot.set_encoding(v1::FLOAT64);
  snapshot.set_points(static_cast<std::uint32_t>(samples.size() / 2));
  snapshot.set_nucleus("13C");
  snapshot.set_observe_frequency_mhz(100.6);
  snapshot.set_spectral_width_hz(24000);
  snapshot.set_centre_shift_ppm(101.25);
  snapshot.set_scans_done(4096);
  snapshot.set_sample("invented sample");
  snapshot.set_instrument("bench-1");
  snapshot.mutable_recorded_at()->set_seconds(1'800'000'000);
  snapshot.mutable_recorded_at()->set_nanos(250'000'000);
  recording.has_centre_shift = true;
  recording.title = "an invented run";
  recording.solvent = "CDCl3";
  recording.samples = std::move(samples);
  return recording;
}

Recording Spectrum(std::vector<double> samples) {
  Recording recording = Fid(std::move(samples));
  recording.snapshot.set_domain(v1::SPECTRUM);
  recording.snapshot.set_points(static_cast<std::uint32_t>(recording.samples.size()));
  return recording;
}

// Values of all sizes, long runs of equal ones and of equal differences among them.
std::vector<double> Mixed(std::size_t count, bool whole) {
  std::mt19937 random(7);
  std::normal_distribution<double> normal;
  std::vector<double> values;
  while (values.size() < count) {
    const double value = normal(random) * std::pow(10.0, static_cast<double>(random() % 9));
    const double step = random() % 3 == 0 ? std::round(10 * normal(random)) : 0;
    for (unsigned i = random() % 40 + 1; i > 0 && values.size() < count; --i) {
      values.push_back((whole ? std::round(value) : value) + i * step);
    }
  }
  return values;
}

void ExpectSameFacts(const Recording& read, const Recording& written) {
  const v1::Snapshot& a = read.snapshot;
  const v1::Snapshot& b = written.snapshot;
  EXPECT_EQ(a.domain(), b.domain());
  EXPECT_EQ(a.points(), b.points());
  EXPECT_EQ(a.nucleus(), b.nucleus());
  EXPECT_EQ(a.observe_frequency_mhz(), b.observe_frequency_mhz());
  EXPECT_NEAR(a.spectral_width_hz(), b.spectral_width_hz(), 1e-9 * b.spectral_width_hz());
  EXPECT_NEAR(a.centre_shift_ppm(), b.centre_shift_ppm(), 1e-9);
  EXPECT_EQ(a.scans_done(), b.scans_done());
  EXPECT_EQ(a.sample(), b.sample());
  EXPECT_EQ(a.instrument(), b.instrument());
  EXPECT_EQ(a.recorded_at().seconds(), b.recorded_at().seconds());
  EXPECT_EQ(a.recorded_at().nanos(), b.recorded_at().nanos());
  EXPECT_EQ(read.has_centre_shift, written.has_centre_shift);
  EXPECT_EQ(read.title, written.title);
  EXPECT_EQ(read.solvent, written.solvent);
}

class BothForms : public testing::TestWithParam<TableForm> {};
INSTANTIATE_TEST_SUITE_P(Tables, BothForms, testing::Values(TableForm::kAffn, TableForm::kDifdup));

TEST_P(BothForms, KeepWholeNumbersAsTheyAre) {
  for (const Recording& recording : {Fid(Mixed(5000, true)), Spectrum(Mixed(5000, true))}) {
    const Recording read = ReadJcampDx(Written(recording, GetParam()), "written");
    EXPECT_EQ(read.samples, recording.samples);
    ExpectSameFacts(read, recording);
  }
}

TEST_P(BothForms, KeepFractionsToThirtyBitsOfTheLargest) {
  for (double scale : {1e-300, 1e-12, 1.0, 1e12, 1e300}) {
    std::vector<double> values = Mixed(3000, false);
    for (double& value : values) value *= scale / 1e9;
    const Recording recording = Fid(values);
    const Recording read = ReadJcampDx(Written(recording, GetParam()), "written");
    double largest = 0;
    double worst = 0;
    for (std::size_t i = 0; i < values.size(); ++i) {
      largest = std::max(largest, std::abs(values[i]));
      worst = std::max(worst, std::abs(values[i] - read.samples[i]));
    }
    // A step is at most 2^-30 of the largest, and half a step is lost.
    EXPECT_LE(worst, largest * 0x1p-31) << scale;
    // Written again nothing changes any more.
    EXPECT_EQ(ReadJcampDx(Written(read, GetParam()), "again").samples, read.samples) << scale;
  }
}

TEST_P(BothForms, KeepTheExtremes) {
  const double most = 2147483647;
  const double tiny = std::numeric_limits<double>::denorm_min();
  const double huge = std::numeric_limits<double>::max();
  for (const std::vector<double>& values :
       {std::vector<double>{0, 0, 0, 0}, {most, -most, most, -most}, {tiny, 0, -tiny, 0}}) {
    EXPECT_EQ(ReadJcampDx(Written(Fid(values), GetParam()), "written").samples, values);
  }
  // Rounded to the nearest of 31 bits the largest double would become infinite.
  const auto read = ReadJcampDx(Written(Fid({huge, -huge, 1, 2}), GetParam()), "written");
  EXPECT_NEAR(read.samples[0] / huge, 1, 1e-9);
}

TEST_P(BothForms, KeepToEightyCharactersALine) {
  std::istringstream lines(Written(Spectrum(Mixed(3000, true)), GetParam()));
  std::size_t count = 0;
  for (std::string line; std::getline(lines, line); ++count) {
    if (line.starts_with("$$")) continue;
    EXPECT_LE(line.size(), 80u) << line;
  }
  EXPECT_GT(count, 30u);
}

TEST(JcampDxWriter, WritesTheSameTableAsByHand) {
  // 1, 2, 3, 3, 2, 1, 0, -1, -2, -3 in difference form: see ordinate_table_test.cpp.
  const std::string text = Written(Spectrum({1, 2, 3, 3, 2, 1, 0, -1, -2, -3}));
  EXPECT_THAT(text, HasSubstr("AJT%jX\n"));
  EXPECT_THAT(text, HasSubstr("##.OBSERVE NUCLEUS= ^13C\n"));
  EXPECT_THAT(text, HasSubstr("##.AVERAGES= 4096\n"));
  EXPECT_THAT(text, HasSubstr("##LONG DATE= 2027/01/15 08:00:00.250000000 +0000\n"));
  EXPECT_TRUE(text.ends_with("\n##END=\n"));
}

TEST(JcampDxWriter, CarriesTheCautions) {
  const std::string text = Written(Fid({1, 2, 3, 4}));
  for (std::string_view caution : engine::Cautions()) EXPECT_THAT(text, HasSubstr(caution.data()));
}

TEST(JcampDxWriter, TurnsAReversedFidToTheSenseOfTheFormat) {
  Recording recording = Fid({1, 2, 3, 4});
  recording.snapshot.set_reversed(true);
  const Recording read = ReadJcampDx(Written(recording), "written");
  EXPECT_FALSE(read.snapshot.reversed());
  EXPECT_THAT(read.samples, testing::ElementsAre(1, -2, 3, -4));
}

TEST(JcampDxWriter, KeepsTheDirectionOfASpectrum) {
  Recording recording = Spectrum({1, 2, 3, 4, 5});
  for (bool reversed : {false, true}) {
    recording.snapshot.set_reversed(reversed);
    const Recording read = ReadJcampDx(Written(recording), "written");
    EXPECT_EQ(read.snapshot.reversed(), reversed);
    EXPECT_EQ(read.samples, recording.samples);
    EXPECT_NEAR(read.snapshot.centre_shift_ppm(), 101.25, 1e-9);
  }
}

TEST(JcampDxWriter, LeavesOutWhatIsNotKnown) {
  Recording recording = Fid({1, 2, 3, 4});
  recording.has_centre_shift = false;
  recording.snapshot.set_scans_done(0);
  recording.snapshot.clear_recorded_at();
  const Recording read = ReadJcampDx(Written(recording), "written");
  EXPECT_FALSE(read.has_centre_shift);
  EXPECT_EQ(read.snapshot.scans_done(), 0u);
  EXPECT_FALSE(read.snapshot.has_recorded_at());
}

TEST(JcampDxWriter, KeepsTextInItsLine) {
  Recording recording = Fid({1, 2, 3, 4});
  recording.title = "a\n##END=\n$$ M\xC3\xBCller";
  const Recording read = ReadJcampDx(Written(recording), "written");
  EXPECT_EQ(read.title, "a ##END= $ $ M\xC3\xBCller");
  EXPECT_EQ(read.samples.size(), 4u);
}

TEST(JcampDxWriter, RefusesWhatCannotBeWritten) {
  const double nan = std::numeric_limits<double>::quiet_NaN();
  EXPECT_THROW(Written(Fid({1, 2, nan, 4})), std::invalid_argument);
  EXPECT_THROW(Written(Fid({1, 2})), std::invalid_argument);
  Recording sizes = Fid({1, 2, 3, 4});
  sizes.snapshot.set_points(3);
  EXPECT_THROW(Written(sizes), std::invalid_argument);
  Recording width = Fid({1, 2, 3, 4});
  width.snapshot.set_spectral_width_hz(0);
  EXPECT_THROW(Written(width), std::invalid_argument);
  Recording narrow = Spectrum({1, 2, 3, 4});
  narrow.snapshot.set_spectral_width_hz(1e-12);
  EXPECT_THROW(Written(narrow), std::invalid_argument);
  Recording domain = Fid({1, 2, 3, 4});
  domain.snapshot.clear_domain();
  EXPECT_THROW(Written(domain), std::invalid_argument);
}

}  // namespace
}  // namespace lastscan::formats
