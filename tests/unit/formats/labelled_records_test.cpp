// Cutting a text into lines, records and blocks, and reading their values.
#include "formats/jcamp/labelled_records.h"

#include <gmock/gmock.h>

#include "formats/jcamp/label_value.h"
#include "sample_text.h"

namespace lastscan::formats::jcamp {
namespace {

using testing::ElementsAre;
using testing::HasSubstr;
using testing::SizeIs;

TEST(Lines, EndAtLineFeedReturnOrBoth) {
  std::vector<std::string> found;
  Lines lines("a\nb\r\nc\rd\n\r\ne");
  while (lines.Next()) found.emplace_back(lines.line());
  EXPECT_THAT(found, ElementsAre("a", "b", "c", "d", "", "e"));
  EXPECT_EQ(lines.number(), 6u);
}

TEST(Labels, AreComparedWithoutCaseBlanksAndMarks) {
  EXPECT_EQ(Comparable("Long Date"), "LONGDATE");
  EXPECT_EQ(Comparable("JCAMP-DX"), "JCAMPDX");
  EXPECT_EQ(Comparable("spectrometer/data_system"), "SPECTROMETERDATASYSTEM");
  EXPECT_EQ(Comparable(".observe\tFREQUENCY"), ".OBSERVEFREQUENCY");
}

TEST(Blocks, HoldTheirRecordsAndSkipPrivateOnes) {
  const auto blocks = SplitIntoBlocks(
      "##TITLE= one\n##$PRIVATE= 1\nmore of it\n##DATE= 27/01/31\n$$ ##END=\n## Np oints = 5\n"
      "##END=\n");
  ASSERT_THAT(blocks, SizeIs(1));
  EXPECT_THAT(blocks[0].records, SizeIs(3));
  EXPECT_EQ(blocks[0].Find("$PRIVATE"), nullptr);
  ASSERT_NE(blocks[0].Find("NPOINTS"), nullptr);
  EXPECT_EQ(blocks[0].Find("NPOINTS")->line, 6u);
  EXPECT_EQ(CountOf(blocks[0].Find("NPOINTS")), 5u);
  EXPECT_EQ(TextOf(blocks[0].Find("DATE")), "27/01/31");
}

TEST(Blocks, LinkedOnesComeAfterTheirOuterOne) {
  const auto blocks = SplitIntoBlocks(
      "##TITLE= outer\n##TITLE= first\n##A= 1\n##END=\n##TITLE= second\n##END=\n##B= 2\n##END=\n");
  ASSERT_THAT(blocks, SizeIs(3));
  EXPECT_EQ(TextOf(blocks[0].Find("TITLE")), "outer");
  EXPECT_EQ(TextOf(blocks[2].Find("TITLE")), "second");
  EXPECT_EQ(blocks[0].Find("A"), nullptr);
  EXPECT_NE(blocks[0].Find("B"), nullptr);
}

TEST(Blocks, WithoutEndAreTruncated) {
  EXPECT_EQ(RefusalOf([] { SplitIntoBlocks("##TITLE= a\n##TITLE= b\n##END=\n##EN"); }),
            "the block that begins in line 1 has no ##END=: the file is truncated or still being "
            "written; wait until it is complete or export it again");
  EXPECT_THAT(RefusalOf([] { SplitIntoBlocks("##END=\n"); }), HasSubstr("outside any block"));
  EXPECT_THAT(RefusalOf([] { SplitIntoBlocks("words\n"); }), HasSubstr("no ##TITLE="));
}

TEST(Blocks, AreNotTakenFromATextOfLabelsOnly) {
  std::string text = "##TITLE=\n";
  for (int i = 0; i < 200'001; ++i) text += "##A=\n";
  EXPECT_THAT(RefusalOf([&] { SplitIntoBlocks(text); }), HasSubstr("more than 200000 labels"));
}

Record RecordOf(std::string_view value) { return {"LABEL", value, 7}; }

TEST(Values, AreTextWithoutCommentInUtf8) {
  const auto text = [](std::string_view value) {
    const Record record = RecordOf(value);
    return TextOf(&record);
  };
  EXPECT_EQ(text("  words here $$ a comment\nsecond line"), "words here");
  EXPECT_EQ(text("M\xFCller \xB5L"), "M\xC3\xBCller \xC2\xB5L");  // Latin-1
  EXPECT_EQ(text("M\xC3\xBCller"), "M\xC3\xBCller");              // UTF-8 already
  EXPECT_EQ(text("\xED\xA0\x80"), "\xC3\xAD\xC2\xA0\xC2\x80");    // a surrogate is no UTF-8
  EXPECT_EQ(text("a\x01"
                 "b"),
            "a b");
  EXPECT_EQ(TextOf(nullptr), "");
}

TEST(Values, AreNumbersOrRefused) {
  const auto number = [](std::string_view value) {
    const Record record = RecordOf(value);
    return NumberOf(&record);
  };
  EXPECT_EQ(number(" +1.5e3 $$ Hz"), 1500);
  EXPECT_EQ(number("  "), std::nullopt);
  for (const char* bad : {"5 kHz", "nan", "inf", "1,5", "+-1", "0x10", "1e999"}) {
    EXPECT_THAT(RefusalOf([&] { number(bad); }),
                HasSubstr("line 7: LABEL should be a number, but reads '"))
        << bad;
  }
  for (const char* bad : {"-1", "2.5", "1e300"}) {
    const Record record = RecordOf(bad);
    EXPECT_THAT(RefusalOf([&] { CountOf(&record); }), HasSubstr("should be a count")) << bad;
  }
}

TEST(Values, AreColumnsOverSeveralLines) {
  EXPECT_THAT(ColumnsOf(RecordOf(" X,  R $$ first\n , I,")), ElementsAre("X", "R", "I", ""));
  const std::string many(100, ',');
  EXPECT_THAT(RefusalOf([&] { ColumnsOf(RecordOf(many)); }), HasSubstr("more than 64 columns"));
}

TEST(Values, AreShownShortAndPrintable) {
  EXPECT_EQ(Shown("\x01 and \xFF"), "'? and ?'");
  EXPECT_EQ(Shown(std::string(50, 'x')), "'" + std::string(40, 'x') + "...'");
}

}  // namespace
}  // namespace lastscan::formats::jcamp
