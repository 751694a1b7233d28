// What a run is told: the same whatever the form of its data, in the lab's own
// convention, bounded by the booking, and kept once it has been said.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include "engine/advice/cautions.h"
#include "engine/run.h"
#include "engine/sensitivity/convention.h"
#include "engine/spectrum/samples.h"
#include "engine/spectrum/transform.h"
#include "unit/engine/limits.h"
#include "unit/engine/run_bench.h"

namespace lastscan::engine {
namespace {

using ::testing::HasSubstr;
using ::testing::Not;

constexpr std::int64_t kBegun = 1'800'000'000;

TEST(RunAdvice, EveryAdviceIsWholeAndInOrder) {
  const std::vector<Sent> sent = Snapshots(FourLines(1), Every(16, 40), WindowGoal(12));
  std::size_t look = 0;
  for (const v1::Advice& advice : Played(sent)) {
    const v1::Snapshot& snapshot = sent[look++].snapshot;
    EXPECT_EQ(advice.run(), snapshot.run());
    EXPECT_EQ(advice.instrument(), snapshot.instrument());
    EXPECT_EQ(advice.sample(), snapshot.sample());
    EXPECT_EQ(advice.nucleus(), "13C");
    EXPECT_EQ(advice.scans_done(), snapshot.scans_done());
    EXPECT_EQ(advice.scans_planned(), 1024u);
    EXPECT_EQ(advice.issued_at().seconds(), snapshot.recorded_at().seconds());
    ASSERT_EQ(static_cast<std::size_t>(advice.cautions_size()), Cautions().size());
    for (int i = 0; i < advice.cautions_size(); ++i) {
      EXPECT_EQ(advice.cautions(i), Cautions()[static_cast<std::size_t>(i)]);
    }
    EXPECT_NE(advice.verdict(), v1::VERDICT_UNSPECIFIED);
    EXPECT_THAT(advice.because(), Not(HasSubstr("\n")));
    EXPECT_GT(advice.because().size(), 20u);
    for (const v1::Interval* interval :
         {&advice.signal_to_noise(), &advice.at_planned_end(), &advice.scans_needed()}) {
      EXPECT_LE(interval->lower(), interval->upper());
      if (!advice.limiting_line().confirmed()) continue;
      EXPECT_LE(interval->lower(), interval->estimate());
      EXPECT_LE(interval->estimate(), interval->upper());
    }
    EXPECT_GE(advice.scans_advised(), advice.scans_done());
    EXPECT_EQ(advice.scans_advised() % 8, 0u) << "whole phase cycles";
    if (advice.scans_done() >= 32) {
      EXPECT_NEAR(advice.seconds_per_scan(), 2.5, 1e-6);
    }
  }
}

TEST(RunAdvice, ReadsTheTruthBehindADigitalReceiver) {
  // Four lines settle delay and phase; the limiting one reads what it is, and
  // the lines are listed highest first with the windows that hold them.
  const rehearsal::InventedSample sample = FourLines(2);
  const v1::Advice advice = Played(Snapshots(sample, Every(64, 8), WindowGoal(500))).back();
  const double truth = 0.7 * 2 * std::sqrt(512.0);
  EXPECT_TRUE(advice.limiting_line().confirmed());
  EXPECT_NEAR(advice.limiting_line().shift_ppm(), 101.3, 0.02);
  EXPECT_NEAR(advice.signal_to_noise().estimate(), truth, 3.29 * std::hypot(1, 0.01 * truth));
  ASSERT_EQ(advice.lines_size(), 4);
  EXPECT_NEAR(advice.lines(0).shift_ppm(), 107.91, 0.02);
  EXPECT_NEAR(advice.lines(1).shift_ppm(), 91.7, 0.02);
  for (const v1::Line& line : advice.lines()) {
    EXPECT_EQ(line.window(), std::abs(line.shift_ppm() - 101.3) < 0.1 ? 0 : -1);
    EXPECT_TRUE(line.confirmed());
  }
}

TEST(RunAdvice, SumAndMeanGiveTheSame) {
  // Powers of two: a mean of them is exact, so the advice must be, to the byte.
  rehearsal::InventedSample sample = OneLine(1);
  const std::vector<std::uint64_t> looks = {8, 16, 32, 64, 128, 256, 512};
  const auto sums = Played(Snapshots(sample, looks, WindowGoal(15)));
  sample.accumulation = v1::MEAN;
  const auto means = Played(Snapshots(sample, looks, WindowGoal(15)));
  ASSERT_EQ(sums.size(), means.size());
  for (std::size_t i = 0; i < sums.size(); ++i) {
    EXPECT_EQ(sums[i].SerializeAsString(), means[i].SerializeAsString()) << looks[i] << " scans";
  }
}

TEST(RunAdvice, EveryEncodingGivesTheSame) {
  rehearsal::InventedSample sample = OneLine(1);
  sample.rounded = true;  // whole numbers that all encodings hold exactly
  sample.noise_rms = 100;
  const std::vector<Sent> sent = Snapshots(sample, Every(32, 6), WindowGoal(15));
  const auto expected = Played(sent);
  for (const v1::Encoding encoding : {v1::FLOAT32, v1::INT32}) {
    std::vector<Sent> other = sent;
    for (Sent& each : other) {
      std::vector<double> values(each.frame.size() / 8);
      std::memcpy(values.data(), each.frame.data(), each.frame.size());
      each.snapshot.set_encoding(encoding);
      each.frame = encoding == v1::INT32
                       ? FrameOf(std::vector<std::int32_t>(values.begin(), values.end()))
                       : FrameOf(std::vector<float>(values.begin(), values.end()));
    }
    const auto advice = Played(other);
    for (std::size_t i = 0; i < advice.size(); ++i) {
      EXPECT_EQ(advice[i].SerializeAsString(), expected[i].SerializeAsString());
    }
  }
}

TEST(RunAdvice, AReversedFidIsTheMirrorImage) {
  std::vector<Sent> sent = Snapshots(OneLine(2), Every(64, 4), WindowGoal(500));
  for (Sent& each : sent) {
    each.snapshot.set_reversed(true);
    each.snapshot.mutable_goal()->clear_windows();
    *each.snapshot.mutable_goal()->add_windows() = ShiftsFrom(98.2, 99.2);
  }
  const v1::Advice advice = Played(sent).back();
  EXPECT_TRUE(advice.limiting_line().confirmed());
  EXPECT_NEAR(advice.limiting_line().shift_ppm(), 98.7, 0.02);
}

// The FIDs of a run, transformed by the sender into real, phased spectra with
// as many samples as points.
std::vector<Sent> AsSpectra(std::vector<Sent> sent) {
  for (Sent& each : sent) {
    const Transform transform(each.snapshot, 2);
    const Points bins = transform.Apply(SummedSamples(each.snapshot, each.frame));
    std::vector<double> falling;
    for (std::size_t j = bins.size(); j >= 2; j -= 2) falling.push_back(bins[j - 2].real());
    each.snapshot.set_domain(v1::SPECTRUM);
    each.snapshot.set_points(static_cast<std::uint32_t>(falling.size()));
    // Samples lie about their own middle, half a sample below the FID's centre.
    each.snapshot.set_centre_shift_ppm(
        transform.axis().PpmAt(static_cast<double>(bins.size() - 2) / 2));
    each.frame = FrameOf(falling);
  }
  return sent;
}

TEST(RunAdvice, ARealPhasedSpectrumIsReadAsItIs) {
  // We claim: limits hold the truth in 93 % of runs at least.
  rehearsal::InventedSample sample = OneLine(1.5);
  sample.lines[0].width_hz = 6;  // broad enough for samples 2 Hz apart
  const double truth = 1.5 * std::sqrt(256.0);
  constexpr int kRuns = 200;
  int inside = 0;
  std::vector<Sent> spectra;
  v1::Advice advice;
  for (int run = 0; run < kRuns; ++run) {
    spectra = AsSpectra(
        Snapshots(sample, Every(64, 4), WindowGoal(500), static_cast<std::uint64_t>(run) + 1));
    advice = Played(spectra).back();
    ASSERT_TRUE(advice.limiting_line().confirmed());
    ASSERT_NEAR(advice.limiting_line().shift_ppm(), 101.3, 0.02);
    ASSERT_EQ(advice.lines_size(), 1);
    inside += advice.signal_to_noise().lower() <= truth && truth <= advice.signal_to_noise().upper()
                  ? 1
                  : 0;
  }
  EXPECT_GE(inside, FewestHits(kRuns, 0.93));
  EXPECT_EQ(advice.matched_broadening_hz(), 0) << "of a spectrum nothing is known of the FID";
  // Sent the other way round it is the same spectrum.
  std::vector<Sent> rising = spectra;
  for (Sent& each : rising) {
    std::vector<double> values(each.frame.size() / 8);
    std::memcpy(values.data(), each.frame.data(), each.frame.size());
    std::reverse(values.begin(), values.end());
    each.frame = FrameOf(values);
    each.snapshot.set_reversed(true);
  }
  EXPECT_EQ(Played(rising).back().SerializeAsString(), advice.SerializeAsString());
}

TEST(RunAdvice, TheConventionsStateTheSameReading) {
  const auto stated = [](v1::Convention convention, double factor) {
    v1::Goal goal = WindowGoal(20 * factor);
    goal.set_convention(convention);
    return Played(Snapshots(OneLine(1), Every(32, 12), goal));
  };
  const auto plain = stated(v1::HEIGHT_OVER_RMS, 1);
  for (const auto& [convention, factor] :
       {std::pair(v1::HEIGHT_OVER_TWICE_RMS, 0.5),
        std::pair(v1::PEAK_TO_PEAK, 2.5 / ExpectedRange(kUsualNoisePoints))}) {
    const auto other = stated(convention, factor);
    for (std::size_t i = 0; i < plain.size(); ++i) {
      EXPECT_EQ(other[i].goal().convention(), convention);
      for (const auto& field : {&v1::Advice::signal_to_noise, &v1::Advice::at_planned_end}) {
        const v1::Interval& a = (plain[i].*field)();
        const v1::Interval& b = (other[i].*field)();
        EXPECT_NEAR(b.estimate(), factor * a.estimate(), 1e-9 * a.upper());
        EXPECT_NEAR(b.lower(), factor * a.lower(), 1e-9 * a.upper());
        EXPECT_NEAR(b.upper(), factor * a.upper(), 1e-9 * a.upper());
      }
      // The target was converted too, so all that follows from it is the same.
      EXPECT_EQ(other[i].verdict(), plain[i].verdict());
      EXPECT_EQ(other[i].scans_advised(), plain[i].scans_advised());
      EXPECT_NEAR(other[i].chance_by_booking_end(), plain[i].chance_by_booking_end(), 1e-9);
    }
  }
}

TEST(RunAdvice, ANoiseWindowIsReadAsTheLabReadsIt) {
  // Without structure it reads the same noise, with its own uncertainty.
  std::vector<Sent> sent = Snapshots(OneLine(1), Every(64, 6), WindowGoal(500));
  const v1::Advice plain = Played(sent).back();
  for (Sent& each : sent) *each.snapshot.mutable_noise_window() = ShiftsFrom(92, 98);
  const v1::Advice named = Played(sent).back();
  const double excess = named.noise().window_excess();
  EXPECT_NEAR(excess, 1, 3.29 / std::sqrt(4 * 150.0)) << "some 150 independent points";
  EXPECT_NE(excess, 1);
  EXPECT_NEAR(named.signal_to_noise().estimate(), plain.signal_to_noise().estimate() / excess,
              1e-6);
  EXPECT_GT(named.signal_to_noise().upper() - named.signal_to_noise().lower(),
            plain.signal_to_noise().upper() - plain.signal_to_noise().lower());
}

TEST(RunAdvice, ALineIsToldFromNothingByThreeGoals) {
  v1::Goal count;
  count.set_target(30);
  count.set_broadening_hz(2);
  count.set_lines(2);
  v1::Advice advice = Played(Snapshots(FourLines(2), Every(64, 6), count)).back();
  // The second strongest of the four.
  EXPECT_NEAR(advice.limiting_line().shift_ppm(), 91.7, 0.02);
  EXPECT_EQ(advice.goal().kind(), v1::LINE_COUNT);

  v1::Goal weakest = WindowGoal(30);
  *weakest.add_windows() = ShiftsFrom(107.4, 108.4);
  *weakest.add_windows() = ShiftsFrom(95.6, 96.6);
  advice = Played(Snapshots(FourLines(2), Every(64, 6), weakest)).back();
  EXPECT_NEAR(advice.limiting_line().shift_ppm(), 101.3, 0.02);

  v1::Goal known = WindowGoal(30);
  known.set_kind(v1::KNOWN_LINE);
  advice = Played(Snapshots(FourLines(2), Every(64, 6), known)).back();
  EXPECT_NEAR(advice.limiting_line().shift_ppm(), 101.3, 0.02);

  known.clear_windows();
  *known.add_windows() = ShiftsFrom(98, 99.5);  // nothing there
  advice = Played(Snapshots(FourLines(2), Every(64, 6), known)).back();
  EXPECT_FALSE(advice.limiting_line().confirmed());
  EXPECT_EQ(advice.signal_to_noise().estimate(), 0);
  EXPECT_TRUE(std::isinf(advice.scans_needed().upper()));
  EXPECT_FALSE(advice.finish_at().has_upper()) << "never is no time";
}

TEST(RunAdvice, ExcludedRangesAndSolventsAreNotLookedAt) {
  rehearsal::InventedSample sample = OneLine(1);
  sample.centre_shift_ppm = 77.16 - 1.3;  // the line where chloroform has its own
  sample.lines[0].shift_ppm = 77.16;
  v1::Goal goal;
  goal.set_target(20);
  goal.set_broadening_hz(2);
  goal.set_lines(1);
  EXPECT_TRUE(Played(Snapshots(sample, Every(64, 4), goal)).back().limiting_line().confirmed());
  goal.set_solvent("chloroform-d");
  v1::Advice advice = Played(Snapshots(sample, Every(64, 4), goal)).back();
  EXPECT_FALSE(advice.limiting_line().confirmed());
  EXPECT_EQ(advice.lines_size(), 0);
  goal.clear_solvent();
  *goal.add_excluded() = ShiftsFrom(76.5, 77.8);
  EXPECT_FALSE(Played(Snapshots(sample, Every(64, 4), goal)).back().limiting_line().confirmed());
}

TEST(RunAdvice, TimeOfAScanIsStatedUntilItIsMeasured) {
  std::vector<Sent> sent = Snapshots(OneLine(1), Every(32, 3), WindowGoal(20));
  EXPECT_EQ(Played(sent)[0].seconds_per_scan(), 0);
  EXPECT_FALSE(Played(sent)[0].has_finish_at()) << "no time is made up";
  for (Sent& each : sent) each.snapshot.set_seconds_per_scan(4);
  const auto advice = Played(sent);
  EXPECT_EQ(advice[0].seconds_per_scan(), 4);
  EXPECT_EQ(advice[1].seconds_per_scan(), 2.5);
  const v1::Advice& last = advice[2];
  const double scans = std::ceil(last.scans_needed().estimate() / 8) * 8;
  EXPECT_NEAR(static_cast<double>(last.finish_at().estimate().seconds()),
              static_cast<double>(kBegun) + 2.5 * std::max(scans, 96.0), 1);
}

}  // namespace
}  // namespace lastscan::engine
