// Every form of a table of ordinates, and every way a table can be wrong.
#include "formats/jcamp/ordinate_table.h"

#include <gmock/gmock.h>

#include "sample_text.h"

namespace lastscan::formats::jcamp {
namespace {

using testing::ElementsAre;
using testing::HasSubstr;

// Points at 0, 1, 2, ..., the table beginning in line 10.
std::vector<double> Decoded(std::string_view lines, std::size_t points) {
  return DecodeOrdinates(lines, 10, {0, static_cast<double>(points - 1), 1, points});
}

std::string Refused(std::string_view lines, std::size_t points) {
  return RefusalOf([&] { Decoded(lines, points); });
}

// The five forms of one series, as McDonald and Wilks, Appl. Spectrosc. 1988, 42,
// 151 show them (from memory).
TEST(OrdinateTable, ReadsTheSameSeriesInAllForms) {
  const auto series = ElementsAre(1, 2, 3, 3, 2, 1, 0, -1, -2, -3);
  EXPECT_THAT(Decoded("0 1 2 3 3 2 1 0 -1 -2 -3\n", 10), series);  // AFFN
  EXPECT_THAT(Decoded("0+1+2+3+3+2+1+0-1-2-3\n", 10), series);     // PAC
  EXPECT_THAT(Decoded("0 1BCCBA@abc\n", 10), series);              // SQZ
  EXPECT_THAT(Decoded("0 1JJ%jjjjjj\n", 10), series);              // DIF
  EXPECT_THAT(Decoded("0 1JT%jX\n", 10), series);                  // DIF with DUP
}

TEST(OrdinateTable, ReadsEveryLetter) {
  EXPECT_THAT(Decoded("0@ABCDEFGHI\n10abcdefghi\n", 19),
              ElementsAre(0, 1, 2, 3, 4, 5, 6, 7, 8, 9, -1, -2, -3, -4, -5, -6, -7, -8, -9));
  EXPECT_THAT(Decoded("0@%JKLMNOPQR\n", 11), ElementsAre(0, 0, 1, 3, 6, 10, 15, 21, 28, 36, 45));
  EXPECT_THAT(Decoded("0@jklmnopqr\n", 10),
              ElementsAre(0, -1, -3, -6, -10, -15, -21, -28, -36, -45));
  // S to Z and s count 1 to 9.
  for (int count = 1; count <= 9; ++count) {
    const std::string line = std::string("0G") + "STUVWXYZs"[count - 1] + "A\n";
    const auto values = Decoded(line, static_cast<std::size_t>(count) + 1);
    EXPECT_EQ(std::count(values.begin(), values.end(), 7), count) << line;
  }
}

TEST(OrdinateTable, ReadsFurtherDigitsOfLetters) {
  EXPECT_THAT(Decoded("0A23b45J6k7\n", 4), ElementsAre(123, -245, -229, -256));
  EXPECT_EQ(Decoded("0A5S2\n", 12), std::vector<double>(12, 15));
}

TEST(OrdinateTable, DuplicateRepeatsTheValueOrInDifferenceFormTheDifference) {
  EXPECT_THAT(Decoded("0A0T\n", 2), ElementsAre(10, 10));
  EXPECT_THAT(Decoded("0A0JU\n", 4), ElementsAre(10, 11, 12, 13));
  // After a value that is written out the difference is forgotten.
  EXPECT_THAT(Decoded("0A0JB0T\n", 4), ElementsAre(10, 11, 20, 20));
}

TEST(OrdinateTable, FirstValueAfterDifferenceLineIsACheck) {
  EXPECT_THAT(Decoded("0A0JJ\n2A2JJ\n4A4\n", 5), ElementsAre(10, 11, 12, 13, 14));
  // A line that ends in a duplicated difference ended in difference form.
  EXPECT_THAT(Decoded("0A0JU\n3A3B0\n", 5), ElementsAre(10, 11, 12, 13, 20));
  // A line that ended with a value written out asks for none.
  EXPECT_THAT(Decoded("0A0JB2\n3A2\n", 4), ElementsAre(10, 11, 22, 12));
  // A duplicate after the check counts the point that stands already.
  EXPECT_THAT(Decoded("0A0J\n1A1T\n", 3), ElementsAre(10, 11, 11));
  EXPECT_THAT(Decoded("0A0J\n\n$$ a comment\n1A1J\n", 3), ElementsAre(10, 11, 12));
}

TEST(OrdinateTable, RefusesAWrongCheckValueByItsLine) {
  EXPECT_EQ(Refused("0A0JJ\n2A3JJ\n", 5),
            "line 11: the check value 13 differs from the last point, 12: the file is damaged; "
            "export it again");
}

TEST(OrdinateTable, TakesEForADigitInLettersAndForAnExponentInFreeNumbers) {
  EXPECT_THAT(Decoded("0E5e5A\n", 3), ElementsAre(55, -55, 1));
  EXPECT_THAT(Decoded("0 1E2 -2.5e-1 3E+2\n", 3), ElementsAre(100, -0.25, 300));
  // Only E among the letters: a number cannot hold two exponents, nor begin with one.
  EXPECT_THAT(Decoded("0E5E6\n", 2), ElementsAre(55, 56));
  EXPECT_THAT(Decoded("0 E5 7\n", 2), ElementsAre(55, 7));
  EXPECT_THAT(Decoded("0E5\n1e6\n", 2), ElementsAre(55, -56));
  // An abscissa may have a signed exponent even before letters.
  EXPECT_THAT(DecodeOrdinates("0E+00A\n1E-03B\n2.0E-03E\n", 1, {0, 0.002, 1, 3}),
              ElementsAre(1, 2, 5));
}

TEST(OrdinateTable, TakesAnyLineEndAndSeparator) {
  const auto series = ElementsAre(1, 2, 3, 4);
  EXPECT_THAT(Decoded("0 1 2\r2 3 4\r", 4), series);
  EXPECT_THAT(Decoded("0 1 2\r\n2 3 4", 4), series);
  EXPECT_THAT(Decoded("0, 1, 2\n\t2;3 ; 4 $$ the end\n", 4), series);
}

TEST(OrdinateTable, CountsLinesWhateverEndsThem) {
  for (const std::string end : {"\n", "\r", "\r\n"}) {
    EXPECT_THAT(Refused("0 1" + end + end + "1 !" + end, 2), testing::StartsWith("line 12: "));
  }
}

TEST(OrdinateTable, ChecksTheAbscissaOfEachLine) {
  EXPECT_THAT(Refused("0 1 2 3 4\n8 5 6 7 8\n", 8),
              HasSubstr("line 11: the abscissa 8 stands where 4 is due"));
  // One spacing and the last digit printed are allowed for, no more.
  EXPECT_EQ(Refused("0 1 2 3 4\n6 5 6 7 8\n", 8), "");
  EXPECT_THAT(Refused("0 1 2 3 4\n6.5 5 6 7 8\n", 8), HasSubstr("6.5 stands where 4 is due"));
  // Rounded to whole numbers, 0.25 apart.
  EXPECT_EQ(RefusalOf([] { DecodeOrdinates("10 1 2 3\n9 4 5 6\n", 1, {10, 8.75, 1, 6}); }), "");
  // Falling, and scaled: 0.5 a step.
  EXPECT_EQ(RefusalOf([] { DecodeOrdinates("5 1 2\n3 3 4\n", 1, {2.5, 1, 0.5, 4}); }), "");
  EXPECT_THAT(RefusalOf([] {
                DecodeOrdinates("5 1 2\n3 3 4\n", 1, {25, 10, 0.5, 4});
              }),
              HasSubstr("the abscissa 2.5 stands where 25 is due"));
}

TEST(OrdinateTable, RefusesMoreOrFewerPointsThanPromised) {
  EXPECT_THAT(Refused("0 1 2\n2 3\n", 4), HasSubstr("4 points are promised but the table holds 3"));
  EXPECT_THAT(Refused("0 1 2\n2 3 4\n", 3), HasSubstr("line 11: more points than the 3 promised"));
  EXPECT_THAT(Refused("", 3), HasSubstr("line 10: 3 points are promised but the table holds 0"));
}

TEST(OrdinateTable, StopsADuplicateCountWithoutEnd) {
  EXPECT_THAT(Refused("0As99999999999999999999\n", 3),
              HasSubstr("more points than the 3 promised"));
}

TEST(OrdinateTable, RefusesWhatIsNoNumber) {
  EXPECT_THAT(Refused("0 1 ? 3\n", 3), HasSubstr("line 10: point 2 is unknown (?)"));
  EXPECT_THAT(Refused("A1 2\n", 2), HasSubstr("begins with its abscissa, this one with 'A1 2'"));
  EXPECT_THAT(Refused("0J1\n", 2), HasSubstr("a difference where the first ordinate"));
  EXPECT_THAT(Refused("0A\n1T\n", 2), HasSubstr("a duplicate count where the first ordinate"));
  EXPECT_THAT(Refused("0AJ\n1JJ\n", 4), HasSubstr("a difference where the first ordinate"));
  EXPECT_THAT(Refused("0 1\n1\n", 2), HasSubstr("line 11: an abscissa without ordinates"));
  EXPECT_THAT(Refused("0 1.2.3\n", 2), HasSubstr("'1.2.' is no number"));
  EXPECT_THAT(Refused("0 - 3\n", 2), HasSubstr("'-' is no number"));
  EXPECT_THAT(Refused("0 1 x\n", 2), HasSubstr("'x' is no number"));
  EXPECT_THAT(Refused("0 1E999 2\n", 2), HasSubstr("'1E999' is no number of any form"));
  EXPECT_THAT(Refused("0A" + std::string(400, '9') + "B\n", 2), HasSubstr("too large"));
}

TEST(OrdinateTable, ReadsLettersExactlyUpToWhatADoubleHolds) {
  EXPECT_THAT(Decoded("0I007199254740991a007199254740991\n", 2),
              ElementsAre(9007199254740991.0, -1007199254740991.0));
  EXPECT_THAT(Decoded("0A2.5J.25\n", 2), ElementsAre(12.5, 13.75));
}

}  // namespace
}  // namespace lastscan::formats::jcamp
