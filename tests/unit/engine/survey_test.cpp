// One look: which lines count for which window, what is read of them, and what
// limit stands where nothing is sure.
#include "engine/sensitivity/survey.h"

#include <gtest/gtest.h>

#include <cmath>

#include "unit/engine/limits.h"
#include "unit/engine/look.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

using Windows = std::vector<std::vector<BinRange>>;

// Windows in Hz from the centre, and the whole spectrum beside them.
struct Ask {
  Ask(const Look& look, std::vector<std::pair<double, double>> windows_hz,
      std::uint32_t lines_wanted = 0)
      : everywhere{{0, look.scaled.axis.bins - 1}} {
    const double middle = static_cast<double>(look.scaled.axis.bins / 2);
    for (const auto& [low, high] : windows_hz) {
      windows.push_back(
          {{static_cast<std::ptrdiff_t>(middle + low / look.scaled.axis.hz_per_bin),
            static_cast<std::ptrdiff_t>(middle + high / look.scaled.axis.hz_per_bin)}});
    }
    options.windows = &windows;
    options.everywhere = &everywhere;
    options.lines_wanted = lines_wanted;
  }
  Ask(const Ask&) = delete;
  Survey At(const Look& look) const { return LookAt(look.scaled, look.curve, look.lines, options); }
  Windows windows;
  std::vector<BinRange> everywhere;
  SurveyOptions options;
};

void AddLineOf(Points& fid, double z, double hz, double width_hz = 2) {
  const Transform transform(PlainSnapshot(static_cast<std::uint32_t>(fid.size())), 2);
  AddLine(fid, AmplitudeFor(z, width_hz, 2, fid.size(), transform), hz / 2000, RateOf(width_hz));
}

Points Blank(std::size_t points, std::uint64_t seed) {
  Points fid(points);
  Noise(seed).AddTo(fid, 1);
  return fid;
}

TEST(Survey, ALineCountsForTheWindowThatHoldsIt) {
  Points fid = Blank(1024, 121);
  AddLineOf(fid, 40, 300);
  AddLineOf(fid, 20, -300);
  const Look look(fid, 2);
  const Ask ask(look, {{-400, -200}, {-50, 50}, {200, 400}});
  const Survey survey = ask.At(look);
  ASSERT_EQ(survey.requirements.size(), 3u);
  EXPECT_TRUE(survey.requirements[0].confirmed);
  EXPECT_FALSE(survey.requirements[1].confirmed);
  EXPECT_TRUE(survey.requirements[2].confirmed);
  EXPECT_EQ(survey.confirmed_windows, (std::vector<bool>{true, false, true}));
  EXPECT_NEAR(survey.requirements[0].reading.estimate, 20, 3.29);
  EXPECT_NEAR(survey.requirements[2].reading.estimate, 40, 3.29);
  ASSERT_EQ(survey.lines.size(), 2u);
  EXPECT_EQ(survey.lines[0].window, 2) << "highest first";
  EXPECT_EQ(survey.lines[1].window, 0);
  EXPECT_EQ(survey.confirmed_lines, 2u);
  // Where nothing is sure there is no number, only a limit.
  EXPECT_EQ(survey.requirements[1].reading.estimate, 0);
  EXPECT_EQ(survey.requirements[1].reading.lower, 0);
  EXPECT_GT(survey.requirements[1].reading.upper, 2);
  EXPECT_LT(survey.requirements[1].reading.upper, 10);
}

TEST(Survey, LinesOutsideTheSearchedRegionDoNotExist) {
  Points fid = Blank(1024, 122);
  AddLineOf(fid, 40, 300);
  const Look look(fid, 2);
  Ask ask(look, {{-400, -200}});
  ask.everywhere = {{0, look.scaled.axis.bins / 2}};  // the lower half alone
  const Survey survey = ask.At(look);
  EXPECT_TRUE(survey.lines.empty());
  EXPECT_LT(survey.strongest, 10);
}

TEST(Survey, TheKthLineIsWhatALineCountIsAbout) {
  Points fid = Blank(1024, 123);
  AddLineOf(fid, 60, 300);
  AddLineOf(fid, 30, -300);
  AddLineOf(fid, 15, -600);
  const Look look(fid, 2);
  for (const auto& [wanted, truth] :
       {std::pair(1u, 60.0), std::pair(2u, 30.0), std::pair(3u, 15.0)}) {
    const Survey survey = Ask(look, {}, wanted).At(look);
    ASSERT_EQ(survey.requirements.size(), 1u);
    EXPECT_TRUE(survey.requirements[0].confirmed);
    EXPECT_NEAR(survey.requirements[0].reading.estimate, truth, 3.29) << wanted;
    EXPECT_EQ(survey.requirements[0].window, -1);
  }
  const Survey survey = Ask(look, {}, 4).At(look);
  EXPECT_FALSE(survey.requirements[0].confirmed);
  EXPECT_EQ(survey.requirements[0].reading.estimate, 0);
  EXPECT_LT(survey.requirements[0].reading.upper, 12) << "the lines found do not hide in it";
}

TEST(Survey, WhatWasConfirmedStaysConfirmed) {
  Points fid = Blank(1024, 124);
  AddLineOf(fid, 4.5, 300);  // stands out, but not enough by itself
  const Look look(fid, 2);
  Ask ask(look, {{200, 400}});
  EXPECT_FALSE(ask.At(look).requirements[0].confirmed);
  ask.options.confirmed_windows = {true};
  const Survey survey = ask.At(look);
  EXPECT_TRUE(survey.requirements[0].confirmed);
  EXPECT_TRUE(survey.confirmed_windows[0]);
  Ask count(look, {}, 1);
  count.options.confirmed_lines = 1;
  EXPECT_TRUE(count.At(look).requirements[0].confirmed);
  EXPECT_EQ(count.At(look).confirmed_lines, 1u);
}

// The foot of a strong line reaches higher than a weak line beside it. What
// rides on the foot is no line, and must not lend its height to one.
TEST(Survey, ARequirementIsReadFromALineAndNotFromAFoot) {
  int of_window = 0;
  int of_count = 0;
  constexpr int kDraws = 40;
  for (int draw = 0; draw < kDraws; ++draw) {
    Points fid = Blank(2048, 200 + draw);
    AddLineOf(fid, 3000, 0, 6);
    AddLineOf(fid, 40, 600);
    const Look look(fid, 2);
    // The window holds the weak line and, at its lower end, a foot of about 70.
    const Survey windows = Ask(look, {{170, 700}}).At(look);
    ASSERT_TRUE(windows.requirements[0].confirmed);
    const Line& line = *windows.requirements[0].line;
    const double hz = (line.bin - 2048) * look.scaled.axis.hz_per_bin;
    of_window += std::abs(hz - 600) < 2 ? 1 : 0;
    const Survey count = Ask(look, {}, 2).At(look);
    ASSERT_TRUE(count.requirements[0].confirmed);
    const double second = (count.requirements[0].line->bin - 2048) * look.scaled.axis.hz_per_bin;
    of_count += std::abs(second - 600) < 2 ? 1 : 0;
  }
  EXPECT_EQ(of_window, kDraws);
  EXPECT_EQ(of_count, kDraws);
}

TEST(Survey, ABlankWindowIsConfirmedAsRarelyAsAsked) {
  constexpr int kRuns = 400;
  int confirmed = 0;
  for (int run = 0; run < kRuns; ++run) {
    const Look look(Blank(512, 3000 + run), 2);
    Ask ask(look, {{-500, -400}, {100, 250}});
    ask.options.false_confirmation = 0.05;
    const Survey survey = ask.At(look);
    confirmed +=
        survey.lines.empty() && !survey.confirmed_windows[0] && !survey.confirmed_windows[1] ? 0
                                                                                             : 1;
  }
  EXPECT_LE(confirmed, MostHits(kRuns, 0.05));
}

TEST(Survey, LimitsHoldALineWhetherItIsConfirmedOrStillHides) {
  // From far below confirmation to well above: as a number with limits, or as
  // "below so much", the truth is held nineteen times in twenty.
  constexpr int kDraws = 600;
  for (const double truth : {3.0, 5.0, 6.0, 8.0}) {
    Noise noise(125);
    int inside = 0;
    int hidden = 0;
    for (int draw = 0; draw < kDraws; ++draw) {
      Points fid(512);
      noise.AddTo(fid, 1);
      const double hz = noise.Uniform(-90, 90);
      AddLineOf(fid, truth, hz);
      const Look look(fid, 2);
      const Survey survey = Ask(look, {{-100, 100}}).At(look);
      const Reading& reading = survey.requirements[0].reading;
      hidden += survey.requirements[0].confirmed ? 0 : 1;
      inside += reading.lower <= truth && truth <= reading.upper ? 1 : 0;
    }
    EXPECT_GE(inside, FewestHits(kDraws, 0.95)) << "truth " << truth << ", hidden " << hidden;
  }
}

}  // namespace
}  // namespace lastscan::engine
