// Frames: every encoding of the same samples gives the same points, in the
// order and on the scale that the rest of the engine relies on.
#include "engine/spectrum/samples.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <limits>

#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

using ::testing::HasSubstr;

// Whole numbers that every encoding holds exactly.
std::vector<double> WholeNumbers(std::size_t count) {
  Noise noise(3);
  std::vector<double> values;
  for (std::size_t i = 0; i < count; ++i) values.push_back(std::round(1e4 * noise.Next()));
  return values;
}

template <typename Scalar>
std::string FrameAs(const std::vector<double>& values) {
  return FrameOf(std::vector<Scalar>(values.begin(), values.end()));
}

TEST(Samples, AFrameHoldsTwoNumbersPerPointOfAnFidAndOnePerPointOfASpectrum) {
  v1::Snapshot snapshot = PlainSnapshot(100);
  snapshot.set_encoding(v1::FLOAT64);
  EXPECT_EQ(FrameBytes(snapshot), 1600u);
  for (const v1::Encoding encoding : {v1::FLOAT32, v1::INT32}) {
    snapshot.set_domain(v1::FID);
    snapshot.set_encoding(encoding);
    EXPECT_EQ(FrameBytes(snapshot), 800u);
    snapshot.set_domain(v1::SPECTRUM);
    EXPECT_EQ(FrameBytes(snapshot), 400u);
  }
  snapshot.set_domain(v1::DOMAIN_UNSPECIFIED);
  EXPECT_EQ(FrameBytes(snapshot), 0u);
  snapshot.set_domain(v1::FID);
  snapshot.set_encoding(v1::ENCODING_UNSPECIFIED);
  EXPECT_EQ(FrameBytes(snapshot), 0u);
}

TEST(Samples, EveryEncodingGivesTheSamePoints) {
  const std::vector<double> values = WholeNumbers(128);
  v1::Snapshot snapshot = PlainSnapshot(64);
  snapshot.set_encoding(v1::FLOAT64);
  const Points points = SummedSamples(snapshot, FrameAs<double>(values));
  ASSERT_EQ(points.size(), 64u);
  for (std::size_t t = 0; t < points.size(); ++t) {
    ASSERT_EQ(points[t], Complex(values[2 * t], values[2 * t + 1])) << "point " << t;
  }
  snapshot.set_encoding(v1::FLOAT32);
  EXPECT_EQ(SummedSamples(snapshot, FrameAs<float>(values)), points);
  snapshot.set_encoding(v1::INT32);
  EXPECT_EQ(SummedSamples(snapshot, FrameAs<std::int32_t>(values)), points);
}

TEST(Samples, AFrameMayStartAtAnyByte) {
  const std::vector<double> values = WholeNumbers(128);
  v1::Snapshot snapshot = PlainSnapshot(64);
  const auto agree = [&](v1::Encoding encoding, const std::string& frame) {
    snapshot.set_encoding(encoding);
    const Points points = SummedSamples(snapshot, frame);
    for (std::size_t skip = 1; skip < 8; ++skip) {
      const std::string shifted = std::string(skip, '\x5a') + frame;
      EXPECT_EQ(SummedSamples(snapshot, std::string_view(shifted).substr(skip)), points)
          << v1::Encoding_Name(encoding) << ", byte " << skip;
    }
  };
  agree(v1::FLOAT64, FrameAs<double>(values));
  agree(v1::FLOAT32, FrameAs<float>(values));
  agree(v1::INT32, FrameAs<std::int32_t>(values));
}

TEST(Samples, AMeanIsTurnedBackIntoASum) {
  const std::vector<double> values = WholeNumbers(128);
  v1::Snapshot snapshot = PlainSnapshot(64, 48);
  const Points as_sum = SummedSamples(snapshot, FrameAs<double>(values));
  snapshot.set_accumulation(v1::MEAN);
  const Points as_mean = SummedSamples(snapshot, FrameAs<double>(values));
  for (std::size_t t = 0; t < as_sum.size(); ++t) {
    ASSERT_EQ(as_mean[t], 48.0 * as_sum[t]) << "point " << t;
  }
}

TEST(Samples, AReversedFidIsConjugated) {
  const std::vector<double> values = WholeNumbers(128);
  v1::Snapshot snapshot = PlainSnapshot(64);
  const Points plain = SummedSamples(snapshot, FrameAs<double>(values));
  snapshot.set_reversed(true);
  const Points reversed = SummedSamples(snapshot, FrameAs<double>(values));
  for (std::size_t t = 0; t < plain.size(); ++t) ASSERT_EQ(reversed[t], std::conj(plain[t]));
}

TEST(Samples, ASpectrumComesOutWithRisingShift) {
  std::vector<double> values(64);
  for (std::size_t i = 0; i < values.size(); ++i) values[i] = static_cast<double>(i);
  v1::Snapshot snapshot = PlainSnapshot(64);
  snapshot.set_domain(v1::SPECTRUM);
  // The first sample is the highest shift, unless the sender says otherwise.
  const Points spectrum = SummedSamples(snapshot, FrameAs<double>(values));
  snapshot.set_reversed(true);
  const Points rising = SummedSamples(snapshot, FrameAs<double>(values));
  ASSERT_EQ(spectrum.size(), 64u);
  ASSERT_EQ(rising.size(), 64u);
  for (std::size_t i = 0; i < 64; ++i) {
    ASSERT_EQ(rising[i], Complex(values[i])) << "bin " << i;
    ASSERT_EQ(spectrum[i], Complex(values[63 - i])) << "bin " << i;
  }
}

TEST(Samples, ANumberThatIsNotFiniteIsRefusedByItsPoint) {
  std::vector<double> values = WholeNumbers(128);
  v1::Snapshot snapshot = PlainSnapshot(64);
  for (const double bad :
       {std::numeric_limits<double>::quiet_NaN(), std::numeric_limits<double>::infinity(),
        -std::numeric_limits<double>::infinity()}) {
    for (const std::size_t at : {0u, 37u, 127u}) {
      std::vector<double> spoilt = values;
      spoilt[at] = bad;
      snapshot.set_domain(v1::FID);
      snapshot.set_encoding(v1::FLOAT64);
      std::string text = RefusalOf([&] { SummedSamples(snapshot, FrameAs<double>(spoilt)); });
      EXPECT_THAT(text, HasSubstr("point " + std::to_string(at / 2) + " of run 'night 1'"));
      EXPECT_THAT(text, HasSubstr("export the snapshot again"));
      snapshot.set_encoding(v1::FLOAT32);
      text = RefusalOf([&] { SummedSamples(snapshot, FrameAs<float>(spoilt)); });
      EXPECT_THAT(text, HasSubstr("point " + std::to_string(at / 2) + " "));
    }
  }
  // Of two bad points the first is named; a spectrum counts its own points.
  values[90] = values[40] = std::numeric_limits<double>::quiet_NaN();
  snapshot.set_points(128);
  snapshot.set_domain(v1::SPECTRUM);
  snapshot.set_encoding(v1::FLOAT64);
  EXPECT_THAT(RefusalOf([&] { SummedSamples(snapshot, FrameAs<double>(values)); }),
              HasSubstr("point 40 of"));
}

}  // namespace
}  // namespace lastscan::engine
