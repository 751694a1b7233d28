// Lines of deuterated solvents, found by any spelling of the name.
#include "engine/sensitivity/solvents.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>

#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

using ::testing::HasSubstr;

bool Covers(const std::vector<v1::ShiftRange>& ranges, double ppm) {
  return std::any_of(ranges.begin(), ranges.end(), [&](const v1::ShiftRange& range) {
    return range.low_ppm() < ppm && ppm < range.high_ppm();
  });
}

TEST(Solvents, AnySpellingFindsThem) {
  for (const char* name : {"CDCl3", "cdcl3", "chloroform-d", "Chloroform D", "CHLOROFORM_D"}) {
    EXPECT_TRUE(Covers(SolventRanges(name, "13C"), 77.16)) << name;
  }
  for (const char* name : {"DMSO-d6", "dmso_d6", "dmso d6", "DMSO", "(CD3)2SO"}) {
    EXPECT_TRUE(Covers(SolventRanges(name, "13C"), 39.52)) << name;
  }
  for (const char* name : {"D2O", "d2o", "Heavy Water", "deuterium-oxide"}) {
    EXPECT_TRUE(Covers(SolventRanges(name, "1H"), 4.79)) << name;
  }
}

// Fulmer et al., Organometallics 2010, 29, 2176, tables 1 and 2: from memory.
TEST(Solvents, PublishedShiftsAreInside) {
  struct Entry {
    const char* solvent;
    const char* nucleus;
    std::vector<double> ppm;
  };
  const std::vector<Entry> entries = {
      {"CDCl3", "1H", {7.26, 1.56}},
      {"DMSO-d6", "1H", {2.50, 3.33}},
      {"CD3OD", "13C", {49.00}},
      {"CD3OD", "1H", {3.31, 4.87}},
      {"C6D6", "13C", {128.06}},
      {"C6D6", "1H", {7.16}},
      {"acetone-d6", "13C", {29.84, 206.26}},
      {"CD3CN", "13C", {1.32, 118.26}},
      {"CD2Cl2", "13C", {53.84}},
      {"THF-d8", "13C", {67.21, 25.31}},
      {"toluene-d8", "13C", {137.48, 128.87, 127.96, 125.13}},
  };
  for (const Entry& entry : entries) {
    const auto ranges = SolventRanges(entry.solvent, entry.nucleus);
    for (const double ppm : entry.ppm) {
      EXPECT_TRUE(Covers(ranges, ppm)) << entry.solvent << ' ' << entry.nucleus << ' ' << ppm;
    }
    // Narrow enough to leave the sample's own lines alone.
    for (const auto& range : ranges) EXPECT_LT(range.high_ppm() - range.low_ppm(), 3);
  }
}

TEST(Solvents, HeavyWaterHasNoCarbonAndNoSolventHasNitrogenOfItsOwn) {
  EXPECT_TRUE(SolventRanges("D2O", "13C").empty());
  EXPECT_TRUE(SolventRanges("CD3CN", "15N").empty());
  EXPECT_TRUE(SolventRanges("CDCl3", "29Si").empty());
}

TEST(Solvents, AnUnknownOneIsRefusedWithThoseThatAreKnown) {
  for (const char* name : {"moonshine", "", "d", "CDCl"}) {
    const std::string text = RefusalOf([&] { SolventRanges(name, "13C"); });
    EXPECT_THAT(text, HasSubstr("solvent '" + std::string(name) + "' is not known"));
    EXPECT_THAT(text, HasSubstr(KnownSolvents()));
    EXPECT_THAT(text, HasSubstr("exclude its lines by shift"));
  }
}

TEST(Solvents, EveryNameThatIsListedIsKnown) {
  std::string names = KnownSolvents() + ", ";
  int count = 0;
  for (std::size_t at = 0; at < names.size(); ++count) {
    const std::size_t comma = names.find(", ", at);
    const std::string name = names.substr(at, comma - at);
    EXPECT_NO_THROW(SolventRanges(name, "13C")) << name;
    at = comma + 2;
  }
  EXPECT_GE(count, 10);
}

}  // namespace
}  // namespace lastscan::engine
