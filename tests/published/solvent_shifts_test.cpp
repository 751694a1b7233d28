// The solvent table against a second source: its lines must lie inside the
// ranges that are left out.
//
// Proton shifts of residual solvent and water: Gottlieb, Kotlyar and Nudelman,
// J. Org. Chem. 1997, 62, 7512, seen in openly published copies of their table.
// Carbon shifts: tables of solvent signals that universities publish for their
// students; they differ by up to 0.5 ppm from the ones the engine was given.
#include <gtest/gtest.h>

#include <algorithm>
#include <string>
#include <vector>

#include "engine/sensitivity/solvents.h"

namespace lastscan::engine {
namespace {

struct Published {
  const char* solvent;
  std::vector<double> proton;
  std::vector<double> carbon;
};

const std::vector<Published>& Table() {
  static const std::vector<Published> table = {
      {"CDCl3", {7.26, 1.56}, {77.2}},
      {"acetone-d6", {2.05, 2.84}, {29.9, 206.7}},
      {"DMSO-d6", {2.50, 3.33}, {39.5}},
      {"C6D6", {7.16, 0.40}, {128.4}},
      {"CD3CN", {1.94, 2.13}, {1.39, 118.7}},
      {"CD3OD", {3.31, 4.87}, {49.1}},
      {"CD2Cl2", {5.32}, {54.0}},
      {"D2O", {4.79}, {}},
  };
  return table;
}

bool Covered(const std::vector<v1::ShiftRange>& ranges, double shift) {
  return std::any_of(ranges.begin(), ranges.end(), [&](const v1::ShiftRange& range) {
    return range.low_ppm() < shift && shift < range.high_ppm();
  });
}

TEST(PublishedSolventShifts, LieInTheRangesLeftOut) {
  for (const Published& row : Table()) {
    const std::vector<v1::ShiftRange> proton = SolventRanges(row.solvent, "1H");
    const std::vector<v1::ShiftRange> carbon = SolventRanges(row.solvent, "13C");
    for (double shift : row.proton) EXPECT_TRUE(Covered(proton, shift)) << row.solvent << shift;
    for (double shift : row.carbon) EXPECT_TRUE(Covered(carbon, shift)) << row.solvent << shift;
    EXPECT_EQ(carbon.size(), row.carbon.size()) << row.solvent;
  }
}

// What is left out is little: a sample's lines beside the solvent's are seen.
TEST(PublishedSolventShifts, RangesAreNarrow) {
  for (const Published& row : Table()) {
    for (const std::string nucleus : {"1H", "13C"}) {
      for (const v1::ShiftRange& range : SolventRanges(row.solvent, nucleus)) {
        EXPECT_LT(range.high_ppm() - range.low_ppm(), nucleus == "1H" ? 0.2 : 3) << row.solvent;
      }
    }
  }
}

}  // namespace
}  // namespace lastscan::engine
