// The goal and snapshot options as a command line gives them.
#include "commands/goal_options.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>

#include "commands/command.h"

namespace lastscan::commands {
namespace {

using ::testing::AllOf;
using ::testing::HasSubstr;
using ::testing::ThrowsMessage;

struct Parsed {
  GoalOptions goal;
  SnapshotOptions facts;
  std::vector<std::string> files;

  explicit Parsed(std::vector<std::string> arguments) {
    CLI::App program;
    program.add_option("FILE", files);
    goal.AddTo(program);
    facts.AddTo(program);
    std::reverse(arguments.begin(), arguments.end());  // as CLI11 wants them
    program.parse(arguments);
    goal.Check();
  }

  v1::Goal Goal() const {
    v1::Goal result;
    goal.ApplyTo(result);
    return result;
  }
};

formats::Recording CompleteRecording() {
  formats::Recording recording;
  v1::Snapshot& snapshot = recording.snapshot;
  snapshot.set_nucleus("13C");
  snapshot.set_observe_frequency_mhz(100.6);
  snapshot.set_spectral_width_hz(24000);
  snapshot.set_scans_done(64);
  snapshot.set_domain(v1::FID);
  snapshot.set_encoding(v1::FLOAT64);
  snapshot.set_points(4);
  recording.has_centre_shift = true;
  recording.title = "a title";
  recording.samples.assign(8, 1.0);
  return recording;
}

TEST(GoalOptions, ReadsAWholeGoal) {
  const v1::Goal goal =
      Parsed({"--target",    "30",    "--convention", "peak-to-peak", "--window",     "20:60",
              "--window",    "-5:10", "--exclude",    "76:78",        "--exclude",    "0:1",
              "--assurance", "0.9",   "--tolerance",  "0.05",         "--broadening", "2",
              "--solvent",   "CDCl3"})
          .Goal();
  EXPECT_EQ(goal.kind(), v1::WEAKEST_WINDOW);
  EXPECT_EQ(goal.target(), 30);
  EXPECT_EQ(goal.convention(), v1::PEAK_TO_PEAK);
  ASSERT_EQ(goal.windows_size(), 2);
  EXPECT_EQ(goal.windows(1).low_ppm(), -5);
  EXPECT_EQ(goal.excluded_size(), 2);
  EXPECT_EQ(goal.assurance(), 0.9);
  EXPECT_EQ(goal.tolerance(), 0.05);
  EXPECT_EQ(goal.broadening_hz(), 2);
  EXPECT_EQ(goal.solvent(), "CDCl3");
}

TEST(GoalOptions, WhatIsNotGivenIsLeftToTheSettings) {
  EXPECT_EQ(Parsed({}).Goal().ByteSizeLong(), 0u);
}

TEST(GoalOptions, TheKindFollowsFromWhatIsAskedFor) {
  EXPECT_EQ(Parsed({"--lines", "5"}).Goal().kind(), v1::LINE_COUNT);
  EXPECT_EQ(Parsed({"--known-line", "76:78"}).Goal().kind(), v1::KNOWN_LINE);
  EXPECT_EQ(Parsed({"--target", "5"}).Goal().kind(), v1::GOAL_KIND_UNSPECIFIED);
}

TEST(GoalOptions, AFileAfterARangeStaysAFile) {
  const Parsed parsed({"--window", "20:60", "night/a.jdx", "night/b.jdx"});
  EXPECT_EQ(parsed.Goal().windows_size(), 1);
  EXPECT_THAT(parsed.files, ::testing::ElementsAre("night/a.jdx", "night/b.jdx"));
}

TEST(GoalOptions, RefusesWhatCannotBeMeant) {
  const std::vector<std::vector<std::string>> lines = {{"--target", "0"},
                                                       {"--target", "-3"},
                                                       {"--target", "nan"},
                                                       {"--window", "200:100"},
                                                       {"--window", "20"},
                                                       {"--noise-window", "5:5"},
                                                       {"--exclude", "x:y"},
                                                       {"--lines", "0"},
                                                       {"--assurance", "1"},
                                                       {"--tolerance", "2"},
                                                       {"--broadening", "-1"},
                                                       {"--convention", "rms"},
                                                       {"--accumulated", "both"},
                                                       {"--booking-end", "someday"},
                                                       {"--planned-scans", "-8"},
                                                       {"--phase-cycle", "0"},
                                                       {"--seconds-per-scan", "0"},
                                                       {"--centre-shift", "inf"},
                                                       {"--nucleus", "carbon"},
                                                       {"--receiver-delay", "-1"},
                                                       {"--observe-frequency", "0"},
                                                       {"--scans-done", "0"},
                                                       {"--solvent", "soup"},
                                                       {"--run", "a\nb"},
                                                       {"--run", ""}};
  for (const auto& line : lines) {
    EXPECT_THAT([&] { Parsed{line}; }, ThrowsMessage<WrongUse>(HasSubstr(line[0])))
        << line[0] << " " << line[1];
  }
}

TEST(GoalOptions, RefusesTwoGoalsAtOnce) {
  EXPECT_THAT(
      [] {
        Parsed({"--lines", "3", "--window", "1:2"});
      },
      ThrowsMessage<WrongUse>(AllOf(HasSubstr("--lines"), HasSubstr("--window"))));
  EXPECT_THAT(
      [] {
        Parsed({"--lines", "3", "--known-line", "1:2"});
      },
      ThrowsMessage<WrongUse>(HasSubstr("--known-line")));
  EXPECT_THAT(
      [] {
        Parsed({"--window", "1:2", "--known-line", "1:2"});
      },
      ThrowsMessage<WrongUse>(HasSubstr("--known-line")));
}

TEST(GoalOptions, ReplacesWhatAnotherGoalLooksFor) {
  v1::Goal goal;
  goal.set_kind(v1::WEAKEST_WINDOW);
  goal.add_windows()->set_low_ppm(1);
  goal.set_target(7);
  Parsed({"--lines", "4"}).goal.ApplyTo(goal);
  EXPECT_EQ(goal.kind(), v1::LINE_COUNT);
  EXPECT_EQ(goal.windows_size(), 0);
  EXPECT_EQ(goal.target(), 7);
}

TEST(GoalOptions, TakesAKnownSolventFromTheFileUnlessTold) {
  formats::Recording recording = CompleteRecording();
  recording.solvent = "CDCl3";
  Parsed({}).goal.ApplyTo(recording);
  EXPECT_EQ(recording.snapshot.goal().solvent(), "CDCl3");

  recording.snapshot.clear_goal();
  Parsed({"--solvent", "DMSO-d6"}).goal.ApplyTo(recording);
  EXPECT_EQ(recording.snapshot.goal().solvent(), "DMSO-d6");

  recording.snapshot.clear_goal();
  Parsed({"--solvent", "none"}).goal.ApplyTo(recording);
  EXPECT_EQ(recording.snapshot.goal().solvent(), "");

  recording.solvent = "an unknown mixture";
  Parsed({}).goal.ApplyTo(recording);
  EXPECT_EQ(recording.snapshot.goal().solvent(), "");
}

TEST(SnapshotOptions, FillsNamesThatNobodyGave) {
  formats::Recording recording = CompleteRecording();
  Parsed({}).facts.ApplyTo(recording, "night/a.jdx", "night");
  EXPECT_EQ(recording.snapshot.run(), "night");
  EXPECT_EQ(recording.snapshot.sample(), "a title");
  EXPECT_EQ(recording.snapshot.instrument(), "spectrometer");
  EXPECT_EQ(recording.snapshot.accumulation(), v1::SUM);
}

TEST(SnapshotOptions, OverridesWhatTheFileStates) {
  formats::Recording recording = CompleteRecording();
  recording.has_centre_shift = false;
  recording.snapshot.set_reversed(true);
  Parsed({"--run",
          "r",
          "--sample",
          "s",
          "--instrument",
          "i",
          "--nucleus",
          "15N",
          "--observe-frequency",
          "40.5",
          "--centre-shift",
          "-12.5",
          "--scans-done",
          "9",
          "--planned-scans",
          "99",
          "--phase-cycle",
          "4",
          "--seconds-per-scan",
          "1.5",
          "--booking-end",
          "2027-01-31T07:30:00+01:00",
          "--accumulated",
          "mean",
          "--noise-window",
          "1:2",
          "--receiver-delay",
          "67.98",
          "--reversed"})
      .facts.ApplyTo(recording, "a.jdx", "night");
  const v1::Snapshot& snapshot = recording.snapshot;
  EXPECT_EQ(snapshot.run(), "r");
  EXPECT_EQ(snapshot.sample(), "s");
  EXPECT_EQ(snapshot.instrument(), "i");
  EXPECT_EQ(snapshot.nucleus(), "15N");
  EXPECT_EQ(snapshot.observe_frequency_mhz(), 40.5);
  EXPECT_EQ(snapshot.centre_shift_ppm(), -12.5);
  EXPECT_TRUE(recording.has_centre_shift);
  EXPECT_EQ(snapshot.scans_done(), 9u);
  EXPECT_EQ(snapshot.scans_planned(), 99u);
  EXPECT_EQ(snapshot.phase_cycle(), 4u);
  EXPECT_EQ(snapshot.seconds_per_scan(), 1.5);
  EXPECT_EQ(snapshot.booking_end().seconds(), 1801377000);
  EXPECT_EQ(snapshot.accumulation(), v1::MEAN);
  EXPECT_EQ(snapshot.noise_window().high_ppm(), 2);
  EXPECT_EQ(snapshot.receiver_delay_points(), 67.98);
  EXPECT_FALSE(snapshot.reversed());  // turned round
}

TEST(SnapshotOptions, NamesTheOptionThatSuppliesAMissingFact) {
  formats::Recording recording = CompleteRecording();
  recording.snapshot.set_scans_done(0);
  EXPECT_THAT(
      [&] { Parsed({}).facts.ApplyTo(recording, "a.jdx", "night"); },
      ThrowsMessage<formats::Unreadable>(AllOf(HasSubstr("a.jdx"), HasSubstr("--scans-done"))));
  Parsed({"--scans-done", "8"}).facts.ApplyTo(recording, "a.jdx", "night");
  EXPECT_EQ(recording.snapshot.scans_done(), 8u);
}

}  // namespace
}  // namespace lastscan::commands
