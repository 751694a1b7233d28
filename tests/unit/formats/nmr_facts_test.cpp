// Facts of the experiment: nucleus names, times, shift references.
#include "formats/jcamp/nmr_facts.h"

#include <gmock/gmock.h>

#include <cstdlib>

#include "sample_text.h"

namespace lastscan::formats::jcamp {
namespace {

using testing::HasSubstr;

TEST(NucleusName, IsMassNumberAndSymbol) {
  EXPECT_EQ(NucleusName("^13C"), "13C");
  EXPECT_EQ(NucleusName("13c"), "13C");
  EXPECT_EQ(NucleusName("C13"), "13C");
  EXPECT_EQ(NucleusName("^29SI"), "29Si");
  EXPECT_EQ(NucleusName("^{1}H"), "1H");
  EXPECT_EQ(NucleusName("carbon"), "carbon");
  EXPECT_EQ(NucleusName(""), "");
}

std::int64_t Seconds(const char* text) {
  const auto instant = ParseLongDate(text);
  return instant ? instant->seconds() : -1;
}

// 1,800,000,000 s after 1970 is 2027-01-15 08:00:00 UTC (date -u -d @1800000000).
TEST(LongDate, IsReadInTheFormsInUse) {
  constexpr std::int64_t kInstant = 1'800'000'000;
  for (const char* text :
       {"2027/01/15 08:00:00+0000", "2027/01/15 09:00:00.000 +0100", "2027-01-15T08:00:00Z",
        "2027/01/15 03:00:00 -05:00", "2027/1/15 8:00 +00"}) {
    EXPECT_EQ(Seconds(text), kInstant) << text;
  }
  EXPECT_EQ(ParseLongDate("2027/01/15 08:00:00.25Z")->nanos(), 250'000'000);
}

TEST(LongDate, WithoutOffsetIsLocalTime) {
  const char* before = std::getenv("TZ");
  const std::string kept = before == nullptr ? "" : before;
  setenv("TZ", "XXX-3", 1);  // three hours east of Greenwich
  EXPECT_EQ(Seconds("2027/01/15 11:00:00"), 1'800'000'000);
  EXPECT_EQ(Seconds("2027/01/15"), 1'800'000'000 - 11 * 3600);
  if (before == nullptr) {
    unsetenv("TZ");
  } else {
    setenv("TZ", kept.c_str(), 1);
  }
}

TEST(LongDate, ThatIsNoneIsLeftOut) {
  for (const char* text : {"", "yesterday", "2027/13/01 00:00:00Z", "2027/02/30", "27/01/15",
                           "2027/01/15 24:00Z", "2027/01/15 08:60Z", "2027/01/15 08:00:00Z tail",
                           "2027/01/15 08:00:00 +9999", "0001/01/01 00:00Z"}) {
    EXPECT_FALSE(ParseLongDate(text).has_value()) << text;
  }
}

Recording FactsOf(const std::string& records) {
  const std::string text = "##TITLE= t\n" + records + "##END=\n";
  Recording recording;
  ReadFacts(SplitIntoBlocks(text)[0], recording);
  return recording;
}

TEST(Facts, AreTakenFromTheStandardLabels) {
  setenv("TZ", "UTC0", 1);
  const Recording recording = FactsOf(
      "##.observe_frequency= 125.75 $$ MHz\n##.OBSERVE NUCLEUS= ^13C\n##.AVERAGES= 1024\n"
      "##.SOLVENT NAME= CDCl3\n##SAMPLE DESCRIPTION= invented\n"
      "##SPECTROMETER/DATA SYSTEM= bench-1\n##DATE= 27/01/15\n##TIME= 08:00:00\n");
  unsetenv("TZ");
  EXPECT_EQ(recording.title, "t");
  EXPECT_EQ(recording.solvent, "CDCl3");
  EXPECT_EQ(recording.snapshot.observe_frequency_mhz(), 125.75);
  EXPECT_EQ(recording.snapshot.nucleus(), "13C");
  EXPECT_EQ(recording.snapshot.scans_done(), 1024u);
  EXPECT_EQ(recording.snapshot.sample(), "invented");
  EXPECT_EQ(recording.snapshot.instrument(), "bench-1");
  EXPECT_EQ(recording.snapshot.recorded_at().seconds(), 1'800'000'000);
}

TEST(Facts, ThatCannotBeTrueAreRefused) {
  EXPECT_EQ(FactsOf("").snapshot.observe_frequency_mhz(), 0);
  EXPECT_THAT(RefusalOf([] { FactsOf("##.OBSERVE FREQUENCY= 0\n"); }),
              HasSubstr("line 2: an observe frequency of 0 MHz cannot be"));
  EXPECT_THAT(RefusalOf([] { FactsOf("##.OBSERVE FREQUENCY= 4e8\n"); }), HasSubstr("MHz"));
  EXPECT_THAT(RefusalOf([] { FactsOf("##.OBSERVE FREQUENCY= 400\n##.AVERAGES= -4\n"); }),
              HasSubstr("line 3: .AVERAGES should be a count, but reads -4"));
  EXPECT_FALSE(
      FactsOf("##.OBSERVE FREQUENCY= 400\n##LONG DATE= soon\n").snapshot.has_recorded_at());
}

std::optional<ShiftReference> ReferenceOf(const std::string& value) {
  const std::string text = "##TITLE= t\n##.SHIFT REFERENCE= " + value + "\n##END=\n";
  return ReadShiftReference(SplitIntoBlocks(text)[0]);
}

TEST(ShiftReference, IsPointAndShift) {
  const auto reference = ReferenceOf("INTERNAL, CDCl3, 1, 15.47866");
  ASSERT_TRUE(reference.has_value());
  EXPECT_EQ(reference->point, 1);
  EXPECT_EQ(reference->shift_ppm, 15.47866);
  EXPECT_EQ(ReferenceOf("(EXTERNAL, 2,2-dimethylbutane, 20000.5, -0.5)")->shift_ppm, -0.5);
  EXPECT_EQ(ReferenceOf("INTERNAL,  ,20000.5  ,0")->point, 20000.5);
  for (const char* blank : {"", "INTERNAL, CDCl3, , ", "INTERNAL, 1, 2", "a, b, c, d"}) {
    EXPECT_FALSE(ReferenceOf(blank).has_value()) << blank;
  }
}

}  // namespace
}  // namespace lastscan::formats::jcamp
