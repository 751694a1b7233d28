// A run's state: saved and loaded it goes on to the byte, it does not grow, and
// a damaged one is refused.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>

#include "engine/run.h"
#include "unit/engine/run_bench.h"

namespace lastscan::engine {
namespace {

using ::testing::HasSubstr;

// A night with everything a run must remember: phase, amplitude, noise growth,
// findings, a verdict, a noise window.
std::vector<Sent> EventfulNight() {
  rehearsal::InventedSample sample = FourLines(1.5);
  sample.amplitude = [](std::uint64_t scan) { return scan > 200 ? 0.7 : 1.0; };
  sample.lock_level = [](std::uint64_t scan) { return scan > 200 && scan < 330 ? 0.3 : 0.9; };
  sample.noise = [](std::uint64_t scan) { return scan > 300 ? 1.3 : 1.0; };
  sample.gain_reported = true;
  std::vector<Sent> sent = Snapshots(sample, Every(16, 30), WindowGoal(22));
  for (Sent& each : sent) {
    *each.snapshot.mutable_noise_window() = ShiftsFrom(93, 95);
    each.snapshot.mutable_booking_end()->set_seconds(1'800'003'600);
  }
  return sent;
}

TEST(RunState, LoadedAfterAnySnapshotItGoesOnToTheByte) {
  const std::vector<Sent> sent = EventfulNight();
  const std::vector<v1::Advice> uninterrupted = Played(sent);
  // The night is as eventful as it says, or this shows nothing.
  EXPECT_GE(uninterrupted.back().findings_size(), 2);
  engine::Run run(DefaultSettings());
  for (std::size_t i = 0; i < sent.size(); ++i) {
    if (i > 0) {
      engine::Run loaded = engine::Run::Load(DefaultSettings(), run.Save());
      EXPECT_EQ(loaded.advice().SerializeAsString(), run.advice().SerializeAsString());
      EXPECT_EQ(loaded.Save(), run.Save()) << "after snapshot " << i;
      run = std::move(loaded);
    }
    ASSERT_EQ(Admit(run, sent[i]).SerializeAsString(), uninterrupted[i].SerializeAsString())
        << "snapshot " << i + 1;
  }
}

TEST(RunState, TheSameSnapshotsGiveTheSameAdviceAndState) {
  const std::vector<Sent> sent = EventfulNight();
  engine::Run one(DefaultSettings());
  engine::Run other(DefaultSettings());
  for (const Sent& each : sent) {
    EXPECT_EQ(Admit(one, each).SerializeAsString(), Admit(other, each).SerializeAsString());
  }
  EXPECT_EQ(one.Save(), other.Save());
}

TEST(RunState, DoesNotGrowWithTheSnapshots) {
  rehearsal::InventedSample sample = OneLine(2);
  sample.points = 256;
  engine::Run run(DefaultSettings());
  std::size_t early = 0;
  std::size_t late = 0;
  std::size_t count = 0;
  for (const Sent& each : Snapshots(sample, Every(8, 1000), WindowGoal(5000))) {
    Admit(run, each);
    const std::size_t bytes = run.Save().size();
    std::size_t& largest = ++count <= 250 ? early : late;
    largest = std::max(largest, bytes);
  }
  // Fuller blocks and larger numbers may take a few bytes more; 750 snapshots
  // that each left but one number would take 6,000.
  EXPECT_LT(late, early + 300);
}

TEST(RunState, SavedBeforeTheFirstSnapshotItBeginsAnew) {
  const std::vector<Sent> sent = Snapshots(OneLine(1), Every(32, 2), WindowGoal(20));
  engine::Run run = engine::Run::Load(DefaultSettings(), engine::Run(DefaultSettings()).Save());
  EXPECT_TRUE(run.advice().run().empty());
  EXPECT_EQ(Admit(run, sent[0]).SerializeAsString(), Played(sent)[0].SerializeAsString());
}

TEST(RunState, DamageAnywhereIsRefused) {
  engine::Run run(DefaultSettings());
  for (const Sent& each : Snapshots(OneLine(1), Every(32, 3), WindowGoal(20))) Admit(run, each);
  const std::string state = run.Save();
  int accepted = 0;
  std::size_t first_accepted = 0;
  // Every byte outside the two long arrays, and every 101st inside them.
  for (std::size_t i = 0; i<state.size(); i += i> 400 && i + 3000 < state.size() ? 101 : 1) {
    for (const char flip : {'\x01', '\x80'}) {
      std::string damaged = state;
      damaged[i] = static_cast<char>(damaged[i] ^ flip);
      try {
        engine::Run::Load(DefaultSettings(), damaged);
        if (accepted++ == 0) first_accepted = i;
      } catch (const Refusal& refusal) {
        EXPECT_EQ(std::string(refusal.what()).find('\n'), std::string::npos);
      }
    }
  }
  EXPECT_EQ(accepted, 0) << "the first one at byte " << first_accepted << " of " << state.size();
}

TEST(RunState, WhatSaveDidNotWriteIsRefused) {
  engine::Run run(DefaultSettings());
  for (const Sent& each : Snapshots(OneLine(1), Every(32, 2), WindowGoal(20))) Admit(run, each);
  const std::string state = run.Save();
  for (const std::string& other : {std::string(), std::string("not a run"), std::string(5000, '\0'),
                                   state.substr(0, state.size() / 2),
                                   state.substr(0, state.size() - 1), state + "x", state + state}) {
    EXPECT_THAT(RefusalOf([&] { engine::Run::Load(DefaultSettings(), other); }),
                HasSubstr("saved"));
  }
}

TEST(RunState, OtherDefaultsThanItBeganWithDoNotMixSpectra) {
  // The sender leaves the broadening to the settings, and they change while the
  // daemon is down.
  v1::Goal goal = WindowGoal(20);
  goal.clear_broadening_hz();
  const std::vector<Sent> sent = Snapshots(OneLine(1), Every(32, 3), goal);
  engine::Run run(DefaultSettings());
  Admit(run, sent[0]);
  v1::EngineSettings changed = DefaultSettings();
  for (auto& nucleus : *changed.mutable_nuclei()) {
    nucleus.mutable_goal()->set_broadening_hz(5);
  }
  engine::Run loaded = engine::Run::Load(changed, run.Save());
  EXPECT_THAT(RefusalOf([&] { Admit(loaded, sent[1]); }),
              HasSubstr("broadening of run 'night 1' changed from 1 to 5 Hz"));
}

TEST(RunState, AnotherDefaultGoalIsJudgedAfresh) {
  v1::Goal open = WindowGoal(20);
  open.clear_target();
  const std::vector<Sent> sent = Snapshots(OneLine(2), Every(32, 6), open);
  engine::Run run(DefaultSettings());
  for (std::size_t i = 0; i + 1 < sent.size(); ++i) Admit(run, sent[i]);
  ASSERT_EQ(run.advice().verdict(), v1::ENOUGH) << "the default asks for 10";
  v1::EngineSettings changed = DefaultSettings();
  for (auto& nucleus : *changed.mutable_nuclei()) nucleus.mutable_goal()->set_target(300);
  engine::Run loaded = engine::Run::Load(changed, run.Save());
  EXPECT_NE(Admit(loaded, sent.back()).verdict(), v1::ENOUGH);
  EXPECT_EQ(loaded.advice().goal().target(), 300);
}

}  // namespace
}  // namespace lastscan::engine
