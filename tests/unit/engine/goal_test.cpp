// Goals: what a sender leaves open, what cannot be meant, and the bins they
// turn into.
#include "engine/advice/goal.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <limits>

#include "engine/run.h"
#include "engine/settings.h"
#include "engine/spectrum/transform.h"
#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

using ::testing::AllOf;
using ::testing::HasSubstr;

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();
constexpr double kInfinity = std::numeric_limits<double>::infinity();

v1::Goal Complete() { return CompletedGoal({}, DefaultsFor(DefaultSettings(), "13C").goal()); }

void AddWindow(v1::Goal& goal, double low, double high) {
  *goal.add_windows() = ShiftsFrom(low, high);
}

TEST(DefaultsFor, TheNucleusItselfThenTheStarThenNothing) {
  v1::EngineSettings settings;
  settings.add_nuclei()->set_nucleus("*");
  settings.mutable_nuclei(0)->set_phase_cycle(4);
  settings.add_nuclei()->set_nucleus("13C");
  settings.mutable_nuclei(1)->set_phase_cycle(8);
  EXPECT_EQ(DefaultsFor(settings, "13C").phase_cycle(), 8u);
  EXPECT_EQ(DefaultsFor(settings, "15N").phase_cycle(), 4u);
  settings.mutable_nuclei(0)->set_nucleus("29Si");
  EXPECT_EQ(DefaultsFor(settings, "15N").phase_cycle(), 0u);
}

TEST(CompletedGoal, TakesWhatIsOpenFromTheDefaults) {
  v1::Goal defaults;
  defaults.set_kind(v1::LINE_COUNT);
  defaults.set_lines(3);
  defaults.set_target(12);
  defaults.set_convention(v1::PEAK_TO_PEAK);
  defaults.set_assurance(0.9);
  defaults.set_tolerance(0.2);
  defaults.set_broadening_hz(2.5);
  defaults.set_solvent("D2O");
  *defaults.add_excluded() = ShiftsFrom(10, 20);
  EXPECT_EQ(CompletedGoal({}, defaults).SerializeAsString(), defaults.SerializeAsString());

  v1::Goal asked;
  asked.set_target(7);
  asked.set_convention(v1::HEIGHT_OVER_RMS);
  asked.set_assurance(0.99);
  asked.set_tolerance(0);
  asked.set_broadening_hz(0);
  asked.set_lines(1);
  asked.set_solvent("CDCl3");
  *asked.add_excluded() = ShiftsFrom(30, 40);
  v1::Goal expected = asked;
  expected.set_kind(v1::LINE_COUNT);
  EXPECT_EQ(CompletedGoal(asked, defaults).SerializeAsString(), expected.SerializeAsString())
      << "what was said stands, a tolerance and a broadening of 0 too";
}

TEST(CompletedGoal, WindowsAskForTheWeakestAndANumberOfLinesForACount) {
  const v1::Goal defaults = DefaultsFor(DefaultSettings(), "13C").goal();
  v1::Goal windows;
  AddWindow(windows, 50, 60);
  EXPECT_EQ(CompletedGoal(windows, defaults).kind(), v1::WEAKEST_WINDOW);
  v1::Goal lines;
  lines.set_lines(4);
  EXPECT_EQ(CompletedGoal(lines, defaults).kind(), v1::LINE_COUNT);
  EXPECT_EQ(CompletedGoal(lines, defaults).lines(), 4u);
  windows.set_kind(v1::KNOWN_LINE);
  EXPECT_EQ(CompletedGoal(windows, defaults).kind(), v1::KNOWN_LINE);
}

TEST(CheckGoal, SaysWhatIsWrongWhereAndWhatToDo) {
  const auto refused = [](auto change) {
    v1::Goal goal = Complete();
    change(goal);
    return RefusalOf([&] { CheckGoal(goal, "the goal of run 'x'"); });
  };
  EXPECT_NO_THROW(CheckGoal(Complete(), "the goal of run 'x'"));
  for (const double target : {0.0, -3.0, kNaN, kInfinity}) {
    EXPECT_THAT(refused([&](v1::Goal& goal) { goal.set_target(target); }),
                AllOf(HasSubstr("target"), HasSubstr("the goal of run 'x'"),
                      HasSubstr("give a number above 0")));
  }
  for (const double assurance : {0.3, 1.0, -1.0, kNaN}) {
    EXPECT_THAT(refused([&](v1::Goal& goal) { goal.set_assurance(assurance); }),
                AllOf(HasSubstr("assurance"), HasSubstr("the goal of run 'x'"),
                      HasSubstr("give a probability from 0.5 to below 1")));
  }
  for (const double tolerance : {-0.1, 0.9, kNaN}) {
    EXPECT_THAT(refused([&](v1::Goal& goal) { goal.set_tolerance(tolerance); }),
                AllOf(HasSubstr("tolerance"), HasSubstr("the goal of run 'x'"),
                      HasSubstr("give a fraction from 0 to below 0.9")));
  }
  for (const double broadening : {-1.0, kNaN, kInfinity}) {
    EXPECT_THAT(refused([&](v1::Goal& goal) { goal.set_broadening_hz(broadening); }),
                AllOf(HasSubstr("broadening"), HasSubstr("the goal of run 'x'"),
                      HasSubstr("give 0 or more")));
  }
  const std::pair<double, double> no_ranges[] = {{60, 50}, {50, 50}, {kNaN, 50}, {50, kInfinity}};
  for (const auto& range : no_ranges) {
    const double low = range.first;
    const double high = range.second;
    EXPECT_THAT(refused([&](v1::Goal& goal) { AddWindow(goal, low, high); }),
                AllOf(HasSubstr("window"), HasSubstr("give the lower shift first")));
    EXPECT_THAT(refused([&](v1::Goal& goal) { *goal.add_excluded() = ShiftsFrom(low, high); }),
                AllOf(HasSubstr("excluded range"), HasSubstr("the goal of run 'x'")));
  }
  EXPECT_THAT(refused([](v1::Goal& goal) { goal.set_kind(v1::WEAKEST_WINDOW); }),
              HasSubstr("give at least one"));
  EXPECT_THAT(refused([](v1::Goal& goal) { goal.set_kind(v1::KNOWN_LINE); }),
              HasSubstr("give exactly one window"));
  EXPECT_THAT(refused([](v1::Goal& goal) {
                goal.set_kind(v1::KNOWN_LINE);
                AddWindow(goal, 50, 60);
                AddWindow(goal, 70, 80);
              }),
              HasSubstr("give exactly one window"));
  EXPECT_THAT(refused([](v1::Goal& goal) { goal.set_kind(v1::GOAL_KIND_UNSPECIFIED); }),
              HasSubstr("name windows or a number of lines"));
}

class Regions : public ::testing::Test {
 protected:
  // 90 to 110 ppm, 2048 bins.
  Axis axis_ = Transform(PlainSnapshot(1024), 1).axis();
  v1::Goal goal_ = Complete();

  double LowPpm(const BinRange& range) { return axis_.PpmAt(static_cast<double>(range.first)); }
  double HighPpm(const BinRange& range) { return axis_.PpmAt(static_cast<double>(range.last)); }
};

TEST_F(Regions, ExclusionsAreCutOutOfWindowsAndOfEverywhere) {
  AddWindow(goal_, 95, 105);
  *goal_.add_excluded() = ShiftsFrom(99, 100);
  *goal_.add_excluded() = ShiftsFrom(104, 120);  // reaches beyond both
  *goal_.add_excluded() = ShiftsFrom(500, 600);  // outside: nothing to exclude
  const SearchRegions regions = RegionsOf(goal_, "13C", axis_);
  ASSERT_EQ(regions.windows.size(), 1u);
  ASSERT_EQ(regions.windows[0].size(), 2u);
  const double bin = 1.01 * axis_.ppm_per_bin();
  EXPECT_NEAR(LowPpm(regions.windows[0][0]), 95, bin);
  EXPECT_NEAR(HighPpm(regions.windows[0][0]), 99, bin);
  EXPECT_LT(HighPpm(regions.windows[0][0]), 99);
  EXPECT_GT(LowPpm(regions.windows[0][1]), 100);
  EXPECT_LT(HighPpm(regions.windows[0][1]), 104);
  ASSERT_EQ(regions.everywhere.size(), 2u);
  EXPECT_EQ(regions.everywhere[0].first, 0);
  EXPECT_FALSE(Contains(regions.everywhere, axis_.BinAt(99.5)));
  EXPECT_FALSE(Contains(regions.everywhere, axis_.BinAt(109.9)));
  EXPECT_TRUE(Contains(regions.everywhere, axis_.BinAt(103)));
}

TEST_F(Regions, ASolventsLinesAreCutOutByItsName) {
  axis_.first_ppm = 70;
  axis_.hz_per_bin = 2;  // 70 to 111 ppm: chloroform's 77.16 inside
  goal_.set_solvent("chloroform-D");
  const SearchRegions regions = RegionsOf(goal_, "13C", axis_);
  EXPECT_FALSE(Contains(regions.everywhere, axis_.BinAt(77.16)));
  EXPECT_TRUE(Contains(regions.everywhere, axis_.BinAt(80)));
  EXPECT_EQ(CountOf(RegionsOf(goal_, "15N", axis_).everywhere), axis_.bins);
}

TEST_F(Regions, AWindowOutsideTheSpectrumIsRefused) {
  for (const auto& [low, high] : {std::pair(80.0, 95.0), {105.0, 110.5}, {200.0, 210.0}}) {
    goal_.clear_windows();
    AddWindow(goal_, low, high);
    EXPECT_THAT(RefusalOf([&] { RegionsOf(goal_, "13C", axis_); }),
                AllOf(HasSubstr("outside the spectrum, which covers 90 to 109.99"),
                      HasSubstr("mend the window or the shift at the centre")));
  }
}

TEST_F(Regions, NothingLeftIsRefused) {
  AddWindow(goal_, 95, 96);
  *goal_.add_excluded() = ShiftsFrom(94, 97);
  EXPECT_THAT(RefusalOf([&] { RegionsOf(goal_, "13C", axis_); }),
              HasSubstr("nothing is left of window 95 to 96 ppm"));
  goal_.clear_windows();
  *goal_.add_excluded() = ShiftsFrom(0, 200);
  EXPECT_THAT(RefusalOf([&] { RegionsOf(goal_, "13C", axis_); }),
              HasSubstr("cover the whole spectrum: exclude less"));
  goal_.clear_excluded();
  AddWindow(goal_, 95, 95.01);
  EXPECT_THAT(RefusalOf([&] { RegionsOf(goal_, "13C", axis_); }), HasSubstr("95 to 95.01 ppm"));
}

TEST(CheckSettings, RefusesTheValueThatIsImpossibleByName) {
  EXPECT_NO_THROW(CheckSettings(DefaultSettings()));
  const auto refused = [](auto change) {
    v1::EngineSettings settings = DefaultSettings();
    change(settings);
    return RefusalOf([&] { engine::Run run(settings); });
  };
  for (const double value : {0.0, -0.1, 0.5, 3.0, kNaN}) {
    EXPECT_THAT(refused([&](auto& settings) { settings.set_false_confirmation(value); }),
                HasSubstr("false_confirmation is "));
    EXPECT_THAT(refused([&](auto& settings) { settings.set_out_of_reach_chance(value); }),
                HasSubstr("out_of_reach_chance is "));
  }
  for (const double value : {0.0, 0.5, 1e7, kNaN}) {
    EXPECT_THAT(refused([&](auto& settings) { settings.set_longest_extension(value); }),
                HasSubstr("longest_extension is "));
  }
  EXPECT_THAT(
      refused([](auto& settings) { settings.mutable_nuclei(1)->mutable_goal()->set_target(-1); }),
      HasSubstr("the default goal of 1H"));
}

TEST(DefaultSettings, AreWhatTheSettingsFileShows) {
  const v1::EngineSettings settings = DefaultSettings();
  EXPECT_EQ(settings.false_confirmation(), 0.01);
  EXPECT_EQ(settings.out_of_reach_chance(), 0.05);
  const v1::Goal carbon = DefaultsFor(settings, "13C").goal();
  EXPECT_EQ(carbon.assurance(), 0.95);
  EXPECT_EQ(carbon.tolerance(), 0.10);
  EXPECT_EQ(carbon.broadening_hz(), 1);
  EXPECT_EQ(carbon.target(), 10) << "quantitation limit of ICH Q2, from memory";
}

}  // namespace
}  // namespace lastscan::engine
