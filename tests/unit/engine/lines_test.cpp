// Lines read from a spectrum: their height and width between the bins, and what
// must not be taken for a line: ripple of a cut-off FID, noise on a foot.
#include "engine/sensitivity/lines.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <numbers>

#include "unit/engine/limits.h"
#include "unit/engine/look.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

constexpr double kTwoPi = 2 * std::numbers::pi;
constexpr std::uint32_t kPoints = 2048;

// `z` and width of a line at `hz` from the centre, in an FID of noise 1.
void AddLineOf(Points& fid, double z, double hz, double width_hz, double broadening_hz,
               double phase = 0) {
  const Transform transform(PlainSnapshot(static_cast<std::uint32_t>(fid.size())), broadening_hz);
  const double amplitude = AmplitudeFor(z, width_hz, broadening_hz, fid.size(), transform);
  AddLine(fid, std::polar(amplitude, phase), hz / 2000, RateOf(width_hz));
}

double BinOf(const Look& look, double hz) {
  return static_cast<double>(look.curve.size()) / 2 + hz / look.scaled.axis.hz_per_bin;
}

TEST(ReadingCurve, IsTheMagnitudeOrTheReadingInPhase) {
  Points fid(kPoints);
  Noise(101).AddTo(fid, 1);
  const Look magnitude(fid, 1);
  for (std::size_t j = 0; j < magnitude.bins.size(); j += 7) {
    ASSERT_NEAR(magnitude.curve[j], std::abs(magnitude.bins[j]) / magnitude.scaled.unit, 1e-12);
  }
  PhaseModel phase{0.8, 67.98, -kTwoPi * 67.98 / 4096, 2048};
  const Look phased(fid, 1, 1, phase);
  for (std::size_t j = 0; j < phased.bins.size(); ++j) {
    const Complex turned =
        phased.bins[j] * std::polar(1.0, -phase.At(static_cast<double>(j))) / phased.scaled.unit;
    ASSERT_NEAR(phased.curve[j], turned.real(), 1e-9) << "bin " << j;
  }
  ScaledSpectrum real = magnitude.scaled;
  real.complex = false;
  const std::vector<double> curve = ReadingCurve(real);
  for (std::size_t j = 0; j < curve.size(); j += 7) {
    ASSERT_NEAR(curve[j], real.bins[j].real() / real.unit, 1e-12);
  }
}

TEST(ReadLines, HeightPlaceAndWidthBetweenTheBins) {
  // Without noise: what is read is what the line is. Width: natural and
  // broadening together, 5 Hz or 10 bins.
  for (const double hz : {100.0, 100.11, 100.244, -333.37}) {
    for (const bool phased : {false, true}) {
      Points fid(kPoints);
      AddLineOf(fid, 500, hz, 3, 2, 0.6);
      const auto phase =
          phased ? std::optional(ConstantPhase(0.6, 4096)) : std::optional<PhaseModel>();
      const Look look(fid, 2, 1, phase);
      ASSERT_FALSE(look.lines.empty());
      const Line& line = look.lines[0];
      EXPECT_NEAR(line.height, 500, 0.001 * 500) << hz << ' ' << phased;
      EXPECT_NEAR(line.bin, BinOf(look, hz), 0.05) << hz << ' ' << phased;
      EXPECT_NEAR(line.width_hz, 5, 0.02 * 5) << hz << ' ' << phased;
    }
  }
}

TEST(ReadLines, TheReadingOfALineBetweenBinsIsWithoutBias) {
  // We claim: within 2 % from a signal-to-noise of 8 on.
  constexpr int kDraws = 600;
  Noise noise(102);
  for (const double truth : {8.0, 20.0}) {
    for (const bool phased : {false, true}) {
      double mean = 0;
      for (int draw = 0; draw < kDraws; ++draw) {
        const double hz = noise.Uniform(-900, 900);
        Points fid(512);
        AddLineOf(fid, truth, hz, 4, 4, 0.6);
        noise.AddTo(fid, 1);
        const auto phase =
            phased ? std::optional(ConstantPhase(0.6, 1024)) : std::optional<PhaseModel>();
        const Look look(fid, 4, 1, phase);
        const auto nearest = std::min_element(
            look.lines.begin(), look.lines.end(), [&](const Line& a, const Line& b) {
              return std::abs(a.bin - BinOf(look, hz)) < std::abs(b.bin - BinOf(look, hz));
            });
        ASSERT_NE(nearest, look.lines.end());
        // Its place was chosen from the data; its phase too where it is not known.
        const double chosen = phased ? 1 : 2;
        mean += std::sqrt(std::max(nearest->height * nearest->height - chosen, 0.0)) / kDraws;
      }
      EXPECT_LT(std::abs(mean / truth - 1), 0.02) << truth << ' ' << phased;
    }
  }
}

TEST(ReadLines, RippleOfACutOffFidIsNotListed) {
  // A line of 0.5 Hz in an FID of half a second, little or not broadened.
  Noise noise(103);
  int runs = 0;
  int with_others = 0;
  for (const double broadening : {0.0, 0.5}) {
    for (const double z : {50.0, 500.0, 5000.0}) {
      for (const bool phased : {false, true}) {
        for (int draw = 0; draw < 40; ++draw) {
          Points fid(1024);
          AddLineOf(fid, z, noise.Uniform(-900, 900), 0.5, broadening, 0.3);
          noise.AddTo(fid, 1);
          const auto phase =
              phased ? std::optional(ConstantPhase(0.3, 2048)) : std::optional<PhaseModel>();
          const Look look(fid, broadening, 1, phase);
          ++runs;
          with_others += look.Sure().size() > 1 ? 1 : 0;
          EXPECT_GE(look.Sure().size(), 1u);
        }
      }
    }
  }
  EXPECT_LE(with_others, MostHits(runs, 0.01)) << "of " << runs;
}

TEST(ReadLines, NoiseRidingOnAFootIsNotALine) {
  constexpr int kDraws = 200;
  Noise noise(104);
  for (const double z : {300.0, 3000.0, 30000.0}) {
    for (const bool phased : {false, true}) {
      int with_others = 0;
      for (int draw = 0; draw < kDraws; ++draw) {
        Points fid(kPoints);
        AddLineOf(fid, z, noise.Uniform(-900, 900), 6, 2, 0.3);
        noise.AddTo(fid, 1);
        const auto phase =
            phased ? std::optional(ConstantPhase(0.3, 4096)) : std::optional<PhaseModel>();
        const std::size_t sure = Look(fid, 2, 1, phase).Sure().size();
        with_others += sure > 1 ? 1 : 0;
        EXPECT_GE(sure, 1u);
      }
      EXPECT_LE(with_others, MostHits(kDraws, 0.01)) << z << ", phased " << phased;
    }
  }
}

TEST(ReadLines, AWeakLineBesideAStrongOneIsSeen) {
  // Where the strong line's foot is no higher than the weak line itself: 40 Hz
  // away in phase, 240 Hz away in magnitude.
  Noise noise(108);
  for (int draw = 0; draw < 40; ++draw) {
    for (const auto& [phased, apart] : {std::pair(true, 40.0), std::pair(false, 240.0)}) {
      Points fid(kPoints);
      AddLineOf(fid, 1500, -200, 2, 2, 0.3);
      AddLineOf(fid, 20, -200 + apart, 2, 2, 0.3);
      noise.AddTo(fid, 1);
      const auto phase =
          phased ? std::optional(ConstantPhase(0.3, 4096)) : std::optional<PhaseModel>();
      const Look look(fid, 2, 1, phase);
      const auto sure = look.Sure();
      ASSERT_EQ(sure.size(), 2u) << "draw " << draw << ", phased " << phased;
      EXPECT_NEAR(sure[1].bin, BinOf(look, -200 + apart), 4);
    }
  }
}

TEST(ReadLines, ABlankSpectrumHasNoSureLine) {
  constexpr int kRuns = 500;
  Noise noise(105);
  int with_lines = 0;
  for (int run = 0; run < kRuns; ++run) {
    Points fid(512);
    noise.AddTo(fid, 1);
    with_lines += Look(fid, 2).Sure().empty() ? 0 : 1;
  }
  EXPECT_LE(with_lines, MostHits(kRuns, 0.01));
}

TEST(ReadLines, OverlappingLinesAreListedEach) {
  Noise noise(106);
  for (int draw = 0; draw < 20; ++draw) {
    // 4 Hz wide as they stand; in phase a pair parts from about one width on,
    // in magnitude only from two and a half.
    for (const auto& [phased, apart] : {std::pair(true, 6.0), std::pair(false, 12.0)}) {
      Points fid(kPoints);
      AddLineOf(fid, 100, 200, 2, 2, 0.3);
      AddLineOf(fid, 80, 200 + apart, 2, 2, 0.3);
      noise.AddTo(fid, 1);
      const auto phase =
          phased ? std::optional(ConstantPhase(0.3, 4096)) : std::optional<PhaseModel>();
      const Look look(fid, 2, 1, phase);
      const auto sure = look.Sure();
      ASSERT_EQ(sure.size(), 2u) << "draw " << draw << ", phased " << phased;
      EXPECT_NEAR(sure[0].bin, BinOf(look, 200), 2);
      EXPECT_NEAR(sure[1].bin, BinOf(look, 200 + apart), 2);
    }
  }
}

TEST(ReadLines, ComeHighestFirst) {
  Noise noise(107);
  for (int draw = 0; draw < 20; ++draw) {
    Points fid(kPoints);
    for (int i = 0; i < 6; ++i) AddLineOf(fid, 20 + 1.5 * i, -800 + 300 * i + draw, 2, 2);
    noise.AddTo(fid, 1);
    const Look look(fid, 2);
    EXPECT_EQ(look.Sure().size(), 6u);
    EXPECT_TRUE(std::is_sorted(look.lines.begin(), look.lines.end(),
                               [](const Line& a, const Line& b) { return a.height > b.height; }));
  }
}

TEST(ApplyPhase, CountsWhatWasChosenAndFallsBackToTheMagnitude) {
  const PhaseModel phase = ConstantPhase(1.0, 4096);
  std::vector<Line> lines(4);
  lines[0].bin = 1000;
  lines[0].reading = std::polar(50.0, 1.01);
  lines[1].bin = 2000;
  lines[1].reading = std::polar(30.0, 0.98);
  lines[2].bin = 3000;  // in phase, but not among those fitted
  lines[2].reading = std::polar(9.0, 1.1);
  lines[3].bin = 3500;  // follows no common phase
  lines[3].reading = std::polar(40.0, 2.2);
  for (Line& line : lines) {
    line.height = (line.reading * std::polar(1.0, -phase.At(line.bin))).real();
  }
  const std::vector<LinePhase> fitted = {{1000, lines[0].reading}, {2000, lines[1].reading}};
  const double in_phase = lines[2].height;
  ApplyPhase(phase, fitted, lines);
  // Two lines, two parameters: each has all its noise in the phase.
  EXPECT_NEAR(lines[0].chosen, 2, 1e-6);
  EXPECT_NEAR(lines[1].chosen, 2, 1e-6);
  EXPECT_EQ(lines[2].chosen, 1);
  EXPECT_EQ(lines[2].height, in_phase);
  EXPECT_EQ(lines[3].chosen, 2);
  EXPECT_DOUBLE_EQ(lines[3].height, 40);
}

}  // namespace
}  // namespace lastscan::engine
