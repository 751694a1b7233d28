// Peaks of a curve and the saddles that part them from higher ground.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>

#include "engine/sensitivity/lines.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

// By definition, bin by bin: a maximum is higher than what is before it and not
// lower than what is behind; on each side the dip is the lowest value up to the
// next higher maximum, or up to the end where there is none.
std::vector<Peak> PeaksByDefinition(const std::vector<double>& curve, double least) {
  const auto count = static_cast<std::ptrdiff_t>(curve.size());
  const auto at = [&](std::ptrdiff_t j) { return curve[static_cast<std::size_t>(j)]; };
  std::vector<Peak> peaks;
  for (std::ptrdiff_t j = 0; j < count; ++j) {
    const bool top = (j == 0 || at(j) > at(j - 1)) && (j + 1 == count || at(j) >= at(j + 1));
    if (!top || at(j) < least) continue;
    double dips[2] = {at(j), at(j)};
    for (const int side : {0, 1}) {
      const int step = side == 0 ? -1 : 1;
      for (std::ptrdiff_t i = j + step; i >= 0 && i < count && at(i) <= at(j); i += step) {
        dips[side] = std::min(dips[side], at(i));
      }
    }
    peaks.push_back({j, at(j), std::max({dips[0], dips[1], 0.0})});
  }
  std::sort(peaks.begin(), peaks.end(),
            [](const Peak& a, const Peak& b) { return a.height > b.height; });
  return peaks;
}

void ExpectSame(const std::vector<Peak>& found, const std::vector<Peak>& expected) {
  ASSERT_EQ(found.size(), expected.size());
  for (std::size_t i = 0; i < found.size(); ++i) {
    EXPECT_EQ(found[i].bin, expected[i].bin) << "peak " << i;
    EXPECT_EQ(found[i].height, expected[i].height) << "peak " << i;
    EXPECT_EQ(found[i].saddle, expected[i].saddle) << "peak at bin " << expected[i].bin;
  }
}

TEST(FindPeaks, AgreesWithTheDefinitionOnRandomCurves) {
  Noise noise(91);
  for (int draw = 0; draw < 300; ++draw) {
    std::vector<double> curve;
    double walk = 0;
    for (int j = 0; j < 120; ++j) {
      walk = 0.9 * walk + noise.Next();
      curve.push_back(draw % 2 == 0 ? 3 * noise.Next() : 3 + 2 * walk);
    }
    ExpectSame(FindPeaks(curve, 2), PeaksByDefinition(curve, 2));
  }
}

TEST(FindPeaks, TheHigherDipIsTheSaddle) {
  const std::vector<double> curve = {0, 8, 3, 6, 1, 9, 0};
  // 6 lies between 8, behind a dip to 3, and 9, behind a dip to 1.
  const auto peaks = FindPeaks(curve, 2);
  ASSERT_EQ(peaks.size(), 3u);
  EXPECT_EQ(peaks[0].bin, 5);
  EXPECT_EQ(peaks[0].saddle, 0);
  EXPECT_EQ(peaks[1].bin, 1);
  EXPECT_EQ(peaks[1].saddle, 1);
  EXPECT_EQ(peaks[2].bin, 3);
  EXPECT_EQ(peaks[2].saddle, 3);
}

TEST(FindPeaks, ALineMayStandAtTheEdge) {
  const auto peaks = FindPeaks(std::vector<double>{7, 2, 1, 4, 9}, 3);
  ASSERT_EQ(peaks.size(), 2u);
  EXPECT_EQ(peaks[0].bin, 4);
  EXPECT_EQ(peaks[0].saddle, 9) << "cut off at its top, as far as one can see";
  EXPECT_EQ(peaks[1].bin, 0);
}

TEST(FindPeaks, APlateauIsOnePeak) {
  const auto peaks = FindPeaks(std::vector<double>{0, 5, 5, 5, 1, 5, 0}, 3);
  ASSERT_EQ(peaks.size(), 2u);
  EXPECT_THAT((std::vector{peaks[0].bin, peaks[1].bin}), ::testing::UnorderedElementsAre(1, 5));
  // A shoulder has no height of its own.
  for (const Peak& peak : FindPeaks(std::vector<double>{0, 5, 5, 8, 0}, 3)) {
    if (peak.bin == 1) {
      EXPECT_EQ(peak.saddle, 5);
    }
  }
}

TEST(FindPeaks, NothingBelowTheLeastHeightAndNoSaddleBelowZero) {
  EXPECT_TRUE(FindPeaks(std::vector<double>{}, 1).empty());
  EXPECT_TRUE(FindPeaks(std::vector<double>{0, 2.9, 0, -5, 1, 0}, 3).empty());
  const auto peaks = FindPeaks(std::vector<double>{-4, 6, -3, 5, -9}, 3);
  ASSERT_EQ(peaks.size(), 2u);
  EXPECT_EQ(peaks[0].saddle, 0);
  EXPECT_EQ(peaks[1].saddle, 0);
}

}  // namespace
}  // namespace lastscan::engine
