// Readings between bins against the sum that defines the spectrum at any
// frequency, and the top of three against the curves it is exact for.
#include "engine/spectrum/interpolation.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <numbers>

#include "engine/spectrum/transform.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

constexpr double kPi = std::numbers::pi;

// An FID of three lines and noise, its spectrum, and the spectrum by definition.
struct Example {
  explicit Example(std::uint32_t points) : transform(PlainSnapshot(points), 0), fid(points) {
    AddLine(fid, std::polar(1.0, 0.4), 0.1003, 0.002);
    AddLine(fid, std::polar(0.3, 2.0), -0.2508, 0.0);
    AddLine(fid, std::polar(2.0, -1.0), 0.4999, 0.01);
    Noise(11).AddTo(fid, 0.3);
    bins = transform.Apply(fid);
    fid[0] *= 0.5;  // as Apply does
  }
  Complex At(double bin) const {
    const auto count = static_cast<double>(transform.axis().bins);
    const double cycles = (bin - count / 2) / count;
    Complex sum = 0;
    for (std::size_t t = 0; t < fid.size(); ++t) {
      sum += fid[t] * std::polar(1.0, -2 * kPi * cycles * static_cast<double>(t));
    }
    return sum;
  }
  Transform transform;
  Points fid;
  Points bins;
};

// The largest of the values that the reading is made of.
double LargestNearBy(const Points& bins, double bin) {
  const auto count = static_cast<std::ptrdiff_t>(bins.size());
  double largest = 0;
  for (auto k = static_cast<std::ptrdiff_t>(bin) - 8; k <= static_cast<std::ptrdiff_t>(bin) + 9;
       ++k) {
    largest =
        std::max(largest, std::abs(bins[static_cast<std::size_t>(((k % count) + count) % count)]));
  }
  return largest;
}

TEST(Interpolation, ValueBetweenBinsIsTheSumByDefinition) {
  for (const std::uint32_t points : {300u, 512u, 1000u}) {
    const Example example(points);
    const double fill = example.transform.fill_ratio();
    Noise random(12);
    double worst = 0;
    for (int i = 0; i < 500; ++i) {
      const double bin = random.Uniform(0, static_cast<double>(example.bins.size()));
      const double error = std::abs(ValueBetweenBins(example.bins, fill, bin) - example.At(bin));
      worst = std::max(worst, error / LargestNearBy(example.bins, bin));
    }
    EXPECT_LT(worst, 1e-4) << points << " points";
  }
}

TEST(Interpolation, OnABinItIsThatBin) {
  const Example example(512);
  for (const std::size_t j : {0u, 1u, 511u, 777u, 1023u}) {
    const Complex value =
        ValueBetweenBins(example.bins, example.transform.fill_ratio(), static_cast<double>(j));
    EXPECT_LT(std::abs(value - example.bins[j]), 1e-9 * LargestNearBy(example.bins, 512));
  }
}

TEST(Interpolation, TheSpectrumWrapsAround) {
  const Example example(512);
  const double fill = example.transform.fill_ratio();
  const auto count = static_cast<double>(example.bins.size());
  for (const double bin : {-3.3, -0.5, 0.2, 2.7, count - 1.5, count - 0.25, count + 4.4}) {
    const Complex value = ValueBetweenBins(example.bins, fill, bin);
    EXPECT_LT(std::abs(value - example.At(bin)),
              1e-4 * LargestNearBy(example.bins, std::fmod(bin + count, count)))
        << bin;
  }
}

TEST(TopOfThree, IsExactForALorentzian) {
  for (const double width : {0.8, 1.5, 6.0}) {  // half width in bins
    for (const double off : {-0.5, -0.31, 0.0, 0.12, 0.49}) {
      const auto y = [&](double x) { return 7 / (1 + std::pow((x - off) / width, 2)); };
      ASSERT_GT(std::min(y(-1), y(1)), 0.2 * y(0)) << "the promise is for such sides";
      const Maximum top = TopOfThree(y(-1), y(0), y(1), 40);
      EXPECT_NEAR(top.bin, 40 + off, 1e-12);
      EXPECT_NEAR(top.height, 7, 1e-12);
    }
  }
}

TEST(TopOfThree, IsExactForAParabolaWhereASideIsLowOrNegative) {
  for (const double off : {-0.45, 0.0, 0.3}) {
    const auto y = [&](double x) { return 5 - 4.8 * (x - off) * (x - off); };
    ASSERT_LT(std::min(y(-1), y(1)), 0.2 * y(0)) << "the promise is for such sides";
    const Maximum top = TopOfThree(y(-1), y(0), y(1), 9);
    EXPECT_NEAR(top.bin, 9 + off, 1e-12);
    EXPECT_NEAR(top.height, 5, 1e-12);
  }
}

TEST(TopOfThree, NeverLeavesTheBinsForAFlatTop) {
  const Maximum flat = TopOfThree(3, 3, 3, 5);
  EXPECT_EQ(flat.bin, 5);
  EXPECT_EQ(flat.height, 3);
  for (const auto& [left, right] : {std::pair(3.0, 2.999999), std::pair(2.9, 3.0)}) {
    const Maximum top = TopOfThree(left, 3, right, 5);
    EXPECT_LE(std::abs(top.bin - 5), 1);
    EXPECT_GE(top.height, 3);
  }
}

}  // namespace
}  // namespace lastscan::engine
