// The amplitude of the reference lines through a run: deviations as stated,
// losses found where they began, memory that does not grow.
#include "engine/advice/amplitude_history.h"

#include <gtest/gtest.h>

#include <cmath>
#include <complex>
#include <numbers>
#include <vector>

#include "unit/engine/limits.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

// An accumulation of two lines of `per_scan` each, noise of 1 per scan.
class Accumulation {
 public:
  Accumulation(double per_scan, std::uint64_t seed)
      : noise_(seed), lines_{std::polar(per_scan, 0.5), std::polar(per_scan, 2.0)}, sum_(20) {}

  // Adds scans at this amplitude and gives the history what a run would give it.
  double Add(AmplitudeHistory& history, double scans, double amplitude) {
    const std::vector<std::complex<float>> before(sum_.begin(), sum_.end());
    const double scans_before = scans_;
    for (std::size_t i = 0; i < 2; ++i) sum_[kBins[i]] += amplitude * scans * lines_[i];
    noise_.AddTo(sum_, std::sqrt(scans));
    scans_ += scans;
    if (history.started()) return history.Add(before, sum_, scans_before, scans_);
    history.Start(std::vector<std::ptrdiff_t>(std::begin(kBins), std::end(kBins)), sum_, scans_, 1,
                  2);
    return 1;
  }

 private:
  static constexpr std::size_t kBins[2] = {4, 13};
  Noise noise_;
  Complex lines_[2];
  Points sum_;
  double scans_ = 0;
};

TEST(AmplitudeHistory, AnIncrementReadsItsRelativeAmplitude) {
  AmplitudeHistory history;
  EXPECT_FALSE(history.started());
  Accumulation accumulation(3, 161);
  accumulation.Add(history, 400, 1);
  EXPECT_TRUE(history.started());
  for (const double amplitude : {1.0, 0.8, 0.5, 1.2}) {
    const double read = accumulation.Add(history, 100, amplitude);
    // The reference carries noise of its own: 1/sqrt(400) of what is common.
    const double deviation =
        std::hypot(history.DeviationOf(100), amplitude * history.DeviationOf(400));
    EXPECT_LT(std::abs(read - amplitude), 3.29 * deviation) << amplitude;
  }
  EXPECT_NEAR(history.DeviationOf(25), 2 * history.DeviationOf(100), 1e-12);
}

TEST(AmplitudeHistory, AnIncrementIsAsSureAsItSays) {
  constexpr int kDraws = 600;
  double squares = 0;
  for (int draw = 0; draw < kDraws; ++draw) {
    AmplitudeHistory history;
    Accumulation accumulation(1, 1000 + draw);
    accumulation.Add(history, 100000, 1);  // the reference as good as known
    squares += std::pow((accumulation.Add(history, 64, 1) - 1) / history.DeviationOf(64), 2);
  }
  EXPECT_GT(squares, LowestChiSquare(kDraws));
  EXPECT_LT(squares, HighestChiSquare(kDraws));
}

TEST(AmplitudeHistory, ANoisyReferenceDoesNotMakeItReadLow) {
  // The reference holds noise, which would pass for signal that then is missing.
  constexpr int kDraws = 2000;
  double sum = 0;
  double squares = 0;
  for (int draw = 0; draw < kDraws; ++draw) {
    AmplitudeHistory history;
    Accumulation accumulation(1, 4000 + draw);
    accumulation.Add(history, 50, 1);  // two lines of 7 rms: 10 together
    const double read = accumulation.Add(history, 50, 1);
    sum += read;
    squares += read * read;
  }
  const double mean = sum / kDraws;
  const double error = std::sqrt((squares / kDraws - mean * mean) / kDraws);
  // With x the noise along the reference over its height, variance 1/98, the
  // mean of (1 + x)/(1 + 2 x) is 1 + 2/98. Were the noise's own power, 4/98,
  // left in the reference, it would be as much below 1.
  EXPECT_NEAR(mean, 1 + 2.0 / 98, 3.29 * error);
}

TEST(AmplitudeHistory, ALossIsFoundWhereItBegan) {
  for (const double loss : {0.2, 0.4}) {
    AmplitudeHistory history;
    Accumulation accumulation(2, 162);
    for (int look = 1; look <= 40; ++look) accumulation.Add(history, 32, look <= 24 ? 1 : 1 - loss);
    const auto change = history.Change(5);
    ASSERT_TRUE(change) << loss;
    EXPECT_NEAR(change->since_scan, 24 * 32, 2 * 32) << loss;
    EXPECT_NEAR(change->ratio, 1 - loss, 3.29 * history.DeviationOf(16 * 32) * std::sqrt(2));
    EXPECT_GE(change->significance, 5);
  }
}

TEST(AmplitudeHistory, ASteadyRunShowsNoChange) {
  constexpr int kRuns = 300;
  int changed = 0;
  for (int run = 0; run < kRuns; ++run) {
    AmplitudeHistory history;
    Accumulation accumulation(2, 2000 + run);
    for (int look = 1; look <= 80; ++look) {
      accumulation.Add(history, 32, 1);
      changed += history.Change(5) ? 1 : 0;
    }
  }
  EXPECT_LE(changed, MostHits(kRuns, 0.001));
}

TEST(AmplitudeHistory, RemembersNoMoreBlocksThanItMay) {
  AmplitudeHistory history;
  Accumulation accumulation(2, 163);
  for (int look = 1; look <= 500; ++look) {
    accumulation.Add(history, 8, look <= 300 ? 1 : 0.7);
    state::Run saved;
    history.SaveTo(saved);
    ASSERT_LE(static_cast<std::size_t>(saved.amplitude_size()), AmplitudeHistory::kMostBlocks);
    double scans = 0;
    for (const auto& block : saved.amplitude()) scans += block.scans();
    ASSERT_DOUBLE_EQ(scans, 8 * look) << "merged, not dropped";
  }
  const auto change = history.Change(5);
  ASSERT_TRUE(change);
  EXPECT_NEAR(change->since_scan, 2400, 500 * 8 / 16.0);  // to a block
}

TEST(AmplitudeHistory, SavedAndRestoredItGoesOnAsBefore) {
  AmplitudeHistory history;
  Accumulation accumulation(2, 164);
  for (int look = 1; look <= 70; ++look) accumulation.Add(history, 8, look <= 40 ? 1 : 0.6);
  state::Run saved;
  history.SaveTo(saved);
  AmplitudeHistory restored;
  restored.RestoreFrom(saved);
  EXPECT_TRUE(restored.started());
  EXPECT_EQ(restored.DeviationOf(7), history.DeviationOf(7));
  EXPECT_EQ(restored.Change(3)->significance, history.Change(3)->significance);
  EXPECT_EQ(restored.Change(3)->since_scan, history.Change(3)->since_scan);
  state::Run again;
  restored.SaveTo(again);
  EXPECT_EQ(again.SerializeAsString(), saved.SerializeAsString());
}

}  // namespace
}  // namespace lastscan::engine
