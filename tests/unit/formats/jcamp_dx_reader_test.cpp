// Whole files: which block is read, what its axis means, and what is refused.
#include <gmock/gmock.h>

#include "formats/jcamp_dx.h"
#include "sample_text.h"

namespace lastscan::formats {
namespace {

using testing::DoubleNear;
using testing::ElementsAre;
using testing::HasSubstr;
using testing::StartsWith;

Recording Read(const std::string& text) { return ReadJcampDx(text, "a.dx"); }
std::string Refused(const std::string& text) {
  return RefusalOf([&] { Read(text); });
}

std::string WithLineEnd(const std::string& text, const std::string& end) {
  std::string other;
  for (char c : text) other += c == '\n' ? end : std::string(1, c);
  return other;
}

TEST(JcampDxReader, KnowsItsOwn) {
  EXPECT_TRUE(LooksLikeJcampDx("##TITLE= x"));
  EXPECT_TRUE(LooksLikeJcampDx("\xEF\xBB\xBF\r\n$$ a comment\r\n ##Title= x"));
  EXPECT_FALSE(LooksLikeJcampDx(""));
  EXPECT_FALSE(LooksLikeJcampDx("TITLE= x"));
  EXPECT_FALSE(LooksLikeJcampDx("##END=\n##TITLE= x"));
}

TEST(JcampDxReader, ReadsASpectrumInHertz) {
  const Recording recording = Read(SpectrumText().str());
  EXPECT_THAT(recording.samples, ElementsAre(1, 2, 3, 4, -5));
  const v1::Snapshot& snapshot = recording.snapshot;
  EXPECT_EQ(snapshot.domain(), v1::SPECTRUM);
  EXPECT_EQ(snapshot.encoding(), v1::FLOAT64);
  EXPECT_EQ(snapshot.points(), 5u);
  EXPECT_EQ(snapshot.scans_done(), 16u);
  EXPECT_DOUBLE_EQ(snapshot.spectral_width_hz(), 50);
  EXPECT_DOUBLE_EQ(snapshot.centre_shift_ppm(), 10);
  EXPECT_FALSE(snapshot.reversed());
  EXPECT_TRUE(recording.has_centre_shift);
}

TEST(JcampDxReader, ReadsASpectrumFromTheLowestShiftUp) {
  SpectrumText text;
  text.axis = "##XUNITS= HZ\n##FIRSTX= 980\n##LASTX= 1020\n##NPOINTS= 5\n";
  text.table = "##XYDATA= (X++(Y..Y))\n980 2 4 6\n1010 8 -10\n";
  const Recording recording = Read(text.str());
  EXPECT_TRUE(recording.snapshot.reversed());
  EXPECT_THAT(recording.samples, ElementsAre(2, 4, 6, 8, -10));
  EXPECT_DOUBLE_EQ(recording.snapshot.centre_shift_ppm(), 10);
}

TEST(JcampDxReader, ReadsASpectrumInPpmAsItStands) {
  SpectrumText text;
  text.axis = "##XUNITS= PPM\n##FIRSTX= 10.2\n##LASTX= 9.8\n##NPOINTS= 5\n";
  text.table = "##XYDATA= (X++(Y..Y))\n10.2 2 4 6\n9.9 8 -10\n";
  text.more = "##.SHIFT REFERENCE= INTERNAL, none, 1, 77\n";
  const Recording recording = Read(text.str());
  EXPECT_NEAR(recording.snapshot.spectral_width_hz(), 50, 1e-9);
  EXPECT_DOUBLE_EQ(recording.snapshot.centre_shift_ppm(), 10);
}

TEST(JcampDxReader, MovesAnAxisInHertzToTheShiftReference) {
  SpectrumText text;
  // Points are 0.1 ppm apart; the middle one, number 3, lies 0.2 ppm below the first.
  text.more = "##.SHIFT REFERENCE= INTERNAL, none, 1, 77\n";
  EXPECT_DOUBLE_EQ(Read(text.str()).snapshot.centre_shift_ppm(), 76.8);
  text.more = "##.SHIFT REFERENCE= INTERNAL, none, 4, 77\n";
  EXPECT_DOUBLE_EQ(Read(text.str()).snapshot.centre_shift_ppm(), 77.1);
}

TEST(JcampDxReader, ReadsAnFid) {
  FidText text;
  const Recording plain = Read(text.str());
  EXPECT_THAT(plain.samples, ElementsAre(1, -5, 2, -6, 3, -7, 4, -8));
  EXPECT_EQ(plain.snapshot.domain(), v1::FID);
  EXPECT_EQ(plain.snapshot.points(), 4u);
  EXPECT_DOUBLE_EQ(plain.snapshot.spectral_width_hz(), 1000);
  EXPECT_FALSE(plain.snapshot.reversed());
  EXPECT_FALSE(plain.has_centre_shift);
  // 1000 Hz are 10 ppm: point 1 lies 5 ppm above the centre.
  text.more = "##.SHIFT REFERENCE= INTERNAL, none, 1, 12\n";
  const Recording referenced = Read(text.str());
  EXPECT_TRUE(referenced.has_centre_shift);
  EXPECT_DOUBLE_EQ(referenced.snapshot.centre_shift_ppm(), 7);
}

TEST(JcampDxReader, AppliesTheFactorOfEachPage) {
  FidText text;
  text.span = "##FIRST= 0, 1, -5\n##LAST= 0.003, 4, -8\n##FACTOR= 0.001, 0.5, 2\n";
  EXPECT_THAT(Read(text.str()).samples, ElementsAre(0.5, -10, 1, -12, 1.5, -14, 2, -16));
}

TEST(JcampDxReader, TakesPagesInAnyOrderAndRecordsOfAPage) {
  FidText text;
  text.size = "##VAR_DIM= , ,\n";
  text.real.swap(text.imaginary);
  const std::string points = "##NPOINTS= 4\n##DATA TABLE";
  for (std::string* page : {&text.real, &text.imaginary}) {
    page->replace(page->find("##DATA TABLE"), 12, points);
  }
  EXPECT_THAT(Read(text.str()).samples, ElementsAre(1, -5, 2, -6, 3, -7, 4, -8));
}

TEST(JcampDxReader, TakesTheRealPageOfASpectrum) {
  std::string text = FidText().str();
  for (const char* part : {"NMR FID", "SECONDS"}) {
    const std::string other = *part == 'N' ? "NMR SPECTRUM" : "HZ";
    for (std::size_t at = 0; (at = text.find(part)) != text.npos;) {
      text.replace(at, std::string(part).size(), other);
    }
  }
  const Recording recording = Read(text);
  EXPECT_EQ(recording.snapshot.domain(), v1::SPECTRUM);
  EXPECT_THAT(recording.samples, ElementsAre(1, 2, 3, 4));
}

TEST(JcampDxReader, DoesNotMindLineEndsNorTheCaseOfLabels) {
  for (const std::string& text : {SpectrumText().str(), FidText().str()}) {
    const Recording recording = Read(text);
    EXPECT_EQ(Read(WithLineEnd(text, "\r\n")).samples, recording.samples);
    EXPECT_EQ(Read(WithLineEnd(text, "\r")).samples, recording.samples);
  }
  std::string text = SpectrumText().str();
  const std::string label = "##DATA TYPE";
  text.replace(text.find(label), label.size(), "##Data_Type");
  EXPECT_EQ(Read("\xEF\xBB\xBF" + text).samples.size(), 5u);
}

TEST(JcampDxReader, SearchesLinkedBlocks) {
  SpectrumText other;
  other.kind = "INFRARED SPECTRUM";
  const std::string link = "##TITLE= all\n##JCAMP-DX= 5.01\n##DATA TYPE= LINK\n##BLOCKS= 3\n";
  const std::string text = link + other.str() + FidText().str() + SpectrumText().str() + "##END=\n";
  EXPECT_EQ(Read(text).snapshot.domain(), v1::FID);
  EXPECT_THAT(Refused(link + "##END=\n"), HasSubstr("links to others that are not there"));
  EXPECT_EQ(Refused(link + other.str() + "##END=\n"),
            "a.dx: no one-dimensional NMR FID or spectrum (the block in line 5: it holds "
            "'INFRARED SPECTRUM'): export the FID or the spectrum of one accumulation");
}

TEST(JcampDxReader, RefusesTwoDimensions) {
  SpectrumText text;
  text.kind = "nD NMR SPECTRUM";
  EXPECT_THAT(Refused(text.str()), HasSubstr("data of two or more dimensions"));
  text.kind = "NMR SPECTRUM";
  text.more = "##NUMDIM= 2\n";
  EXPECT_THAT(Refused(text.str()), HasSubstr("data of two or more dimensions"));
  FidText axes;
  axes.variables = "##SYMBOL= A, B, R\n##VAR_TYPE= INDEPENDENT, INDEPENDENT, DEPENDENT\n";
  EXPECT_THAT(Refused(axes.str()), HasSubstr("data of two or more dimensions"));
  FidText array;
  array.imaginary += array.real;
  EXPECT_THAT(Refused(array.str()), HasSubstr("the file holds several FIDs or spectra"));
}

TEST(JcampDxReader, RefusesTruncatedFilesWhereverTheyEnd) {
  for (const std::string& text : {SpectrumText().str(), FidText().str()}) {
    const std::size_t end = text.rfind("##END=");
    for (std::size_t length = text.find('\n'); length < end + 6; ++length) {
      EXPECT_NE(Refused(text.substr(0, length)), "") << length;
    }
    EXPECT_THAT(Refused(text.substr(0, end)), HasSubstr("truncated or still being written"));
    EXPECT_EQ(Refused(text.substr(0, end + 6)), "");
  }
}

TEST(JcampDxReader, RefusesOtherVersionsAndKinds) {
  std::string text = SpectrumText().str();
  text.replace(text.find("5.01"), 4, "9.00");
  EXPECT_THAT(Refused(text), HasSubstr("a.dx: line 2: JCAMP-DX version '9.00'"));
  SpectrumText none;
  none.kind = "";
  EXPECT_THAT(Refused(none.str()), HasSubstr("no ##DATA TYPE= says what it holds"));
  SpectrumText peaks;
  peaks.table = "##PEAK TABLE= (XY..XY)\n1,2\n";
  EXPECT_THAT(Refused(peaks.str()), HasSubstr("neither ##NTUPLES= nor ##XYDATA="));
  SpectrumText pairs;
  pairs.table = "##XYDATA= (XY..XY)\n1,2\n";
  EXPECT_THAT(Refused(pairs.str()), HasSubstr("a table of the form '(XY..XY)'"));
}

TEST(JcampDxReader, RefusesASpectrumThatLacksItsAxis) {
  for (const std::string label : {"FIRSTX", "LASTX", "NPOINTS"}) {
    SpectrumText text;
    text.axis.replace(text.axis.find(label), label.size(), "OTHER");
    EXPECT_THAT(Refused(text.str()), HasSubstr("##" + label + "= is missing")) << label;
  }
  SpectrumText unit;
  unit.axis.replace(unit.axis.find("HZ"), 2, "1/CM");
  EXPECT_THAT(Refused(unit.str()), HasSubstr("an abscissa in '1CM'"));
  SpectrumText step;
  step.axis.replace(step.axis.find("-10"), 3, "-11");
  EXPECT_THAT(Refused(step.str()), HasSubstr("##DELTAX= says -11 between points"));
  SpectrumText flat;
  flat.axis.replace(flat.axis.find("980"), 3, "1020");
  EXPECT_THAT(Refused(flat.str()), HasSubstr("leave no distance between its points"));
}

TEST(JcampDxReader, ReadsWhatItCanWithoutObserveFrequency) {
  SpectrumText spectrum;
  spectrum.frequency = "";
  const Recording hertz = Read(spectrum.str());
  EXPECT_DOUBLE_EQ(hertz.snapshot.spectral_width_hz(), 50);
  EXPECT_FALSE(hertz.has_centre_shift);
  spectrum.axis.replace(spectrum.axis.find("HZ"), 2, "PPM");
  EXPECT_THAT(Refused(spectrum.str()), HasSubstr("PPM without .OBSERVE FREQUENCY"));
  FidText fid;
  fid.more = "##.SHIFT REFERENCE= INTERNAL, none, 1, 12\n";
  std::string text = fid.str();
  text.replace(text.find(".OBSERVE FREQUENCY"), 18, "OTHER");
  EXPECT_DOUBLE_EQ(Read(text).snapshot.spectral_width_hz(), 1000);
  EXPECT_FALSE(Read(text).has_centre_shift);
}

TEST(JcampDxReader, DoesNotTrustPromisedCounts) {
  for (const char* count : {"0", "1", "9000000", "4000000000", "9e15"}) {
    SpectrumText text;
    text.axis.replace(text.axis.find("NPOINTS= 5") + 9, 1, count);
    EXPECT_THAT(Refused(text.str()), HasSubstr("points are promised")) << count;
  }
  // Within what we agree to hold, but not there.
  SpectrumText text;
  text.axis.replace(text.axis.find("NPOINTS= 5") + 9, 1, "8000000");
  text.axis.replace(text.axis.find("##DELTAX"), 14, "");
  EXPECT_NE(Refused(text.str()), "");
}

TEST(JcampDxReader, RefusesAnFidThatLacksAPart) {
  FidText real_only;
  real_only.imaginary = "";
  EXPECT_THAT(Refused(real_only.str()), HasSubstr("no page of its imaginary part"));
  FidText imaginary_only;
  imaginary_only.real = "";
  EXPECT_THAT(Refused(imaginary_only.str()), HasSubstr("no page of its real part"));
  SpectrumText table;
  table.kind = "NMR FID";
  EXPECT_THAT(Refused(table.str()), HasSubstr("the FID has no imaginary part"));
  FidText sizes;
  sizes.size = "##VAR_DIM= 4, 4, 3\n";
  EXPECT_THAT(Refused(sizes.str()), HasSubstr("promises 4 abscissae but 3 ordinates"));
  FidText unnamed;
  unnamed.variables = "##SYMBOL= X, R, Q\n";
  EXPECT_THAT(Refused(unnamed.str()), HasSubstr("'I', which ##SYMBOL= does not name"));
  FidText unit;
  unit.units = "##UNITS= HZ, ARBITRARY UNITS, ARBITRARY UNITS\n";
  EXPECT_THAT(Refused(unit.str()), HasSubstr("an FID along 'HZ'"));
  FidText missing;
  missing.span = "##FIRST= 0, 1, -5\n##FACTOR= 0.001, 1, 1\n";
  EXPECT_THAT(Refused(missing.str()), HasSubstr("##LAST= is missing"));
  FidText words;
  words.size = "##VAR_DIM= four, 4, 4\n";
  EXPECT_THAT(Refused(words.str()), HasSubstr("VARDIM should list numbers, but holds 'four'"));
}

TEST(JcampDxReader, NamesTheLineOfATableInTheFile) {
  FidText text;
  text.imaginary = "##PAGE= N=2\n##DATA TABLE= (X++(I..I)), XYDATA\n0ejU\n3g\n";
  const std::string whole = text.str();
  const auto line =
      1 + std::count(whole.begin(), whole.begin() + static_cast<std::ptrdiff_t>(whole.find("3g\n")),
                     '\n');
  EXPECT_THAT(Refused(whole), StartsWith("a.dx: line " + std::to_string(line) +
                                         ": the check value -7 differs from the last point, -8"));
}

TEST(JcampDxReader, RefusesNumbersThatOverflow) {
  SpectrumText text;
  text.axis.replace(text.axis.find("YFACTOR= 0.5") + 9, 3, "1e308");
  text.table = "##XYDATA= (X++(Y..Y))\n1020 2 4 6\n990 8 -10\n";
  EXPECT_THAT(Refused(text.str()), HasSubstr("point 1 of this table is too large"));
}

TEST(JcampDxReader, RefusesAnAxisThatCannotBe) {
  FidText text;
  text.span = "##FIRST= 0, 1, -5\n##LAST= 3e-310, 4, -8\n##FACTOR= 1e-310, 1, 1\n";
  EXPECT_THAT(Refused(text.str()), HasSubstr("a spectral width of inf Hz"));
}

}  // namespace
}  // namespace lastscan::formats
