// Findings: each fault is named when it is there, with its numbers and the
// scan it began at, and a run without faults is left alone.
#include "engine/advice/findings.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include "unit/engine/synthetic.h"

namespace lastscan::engine {
namespace {

using ::testing::ElementsAre;
using ::testing::HasSubstr;
using ::testing::IsEmpty;

// A snapshot in the middle of a sound run.
Observations Sound(double scans_before = 960, double scans = 1024) {
  Observations seen;
  seen.scans_before = scans_before;
  seen.scans = scans;
  seen.noise_before = {1, 0.002, true};
  seen.noise = {1, 0.002, true};
  seen.noise_of_increment = 1.01;
  seen.deviation_of_increment = 0.01;
  seen.relative_amplitude = 1.02;
  seen.amplitude_deviation = 0.02;
  seen.noise_growth.set_estimate(0.5);
  seen.noise_growth.set_lower(0.47);
  seen.noise_growth.set_upper(0.53);
  seen.window_excess = 1.02;
  seen.window_deviation = 0.02;
  seen.seconds_per_scan = 2.5;
  return seen;
}

v1::Snapshot Plain() { return PlainSnapshot(64, 1024); }

std::vector<v1::FindingKind> KindsOf(const std::vector<v1::Finding>& findings) {
  std::vector<v1::FindingKind> kinds;
  for (const v1::Finding& finding : findings) kinds.push_back(finding.kind());
  return kinds;
}

TEST(Findings, ASoundRunHasNone) {
  Findings findings;
  for (int look = 0; look < 5; ++look) EXPECT_THAT(findings.Look(Plain(), Sound()), IsEmpty());
}

TEST(Findings, AStatedChangeOfGainIsOne) {
  Findings findings;
  v1::Snapshot snapshot = Plain();
  snapshot.set_receiver_gain_db(30);
  EXPECT_THAT(findings.Look(snapshot, Sound()), IsEmpty());
  snapshot.set_receiver_gain_db(30.01);  // rounding of an export
  EXPECT_THAT(findings.Look(snapshot, Sound()), IsEmpty());
  snapshot.set_receiver_gain_db(36);
  const auto found = findings.Look(snapshot, Sound());
  ASSERT_THAT(KindsOf(found), ElementsAre(v1::GAIN_CHANGE));
  EXPECT_EQ(found[0].severity(), v1::HIGH);
  EXPECT_EQ(found[0].since_scan(), 961u);
  EXPECT_THAT(found[0].detail(), HasSubstr("30.0 to 36.0 dB"));
  // The scans do not add up from there on, whatever comes.
  EXPECT_THAT(KindsOf(findings.Look(Plain(), Sound())), ElementsAre(v1::GAIN_CHANGE));
}

TEST(Findings, SignalAndNoiseThatChangeTogetherAreAGainNobodyStated) {
  Findings findings;
  Observations seen = Sound();
  seen.noise_of_increment = 2.0;
  seen.relative_amplitude = 1.98;
  const auto found = findings.Look(Plain(), seen);
  ASSERT_THAT(KindsOf(found), ElementsAre(v1::GAIN_CHANGE));
  EXPECT_EQ(found[0].severity(), v1::HIGH);
  EXPECT_THAT(found[0].detail(), HasSubstr("factor of 2.00"));
}

TEST(Findings, NoiseThatStepsAloneIsAStepOfNoise) {
  for (const auto& [ratio, severity] : {std::pair(1.25, v1::WARNING), std::pair(2.0, v1::HIGH)}) {
    Findings findings;
    Observations seen = Sound();
    seen.noise_of_increment = ratio;
    const auto found = findings.Look(Plain(), seen);
    ASSERT_THAT(KindsOf(found), ElementsAre(v1::NOISE_STEP)) << ratio;
    EXPECT_EQ(found[0].severity(), severity);
    EXPECT_THAT(found[0].detail(), HasSubstr("look at the preamplifier"));
    // It stays said, and is not said twice.
    EXPECT_THAT(KindsOf(findings.Look(Plain(), seen)), ElementsAre(v1::NOISE_STEP));
    EXPECT_THAT(KindsOf(findings.Look(Plain(), Sound())), ElementsAre(v1::NOISE_STEP));
  }
}

TEST(Findings, AStepIsNotSeenInNoiseThatIsItselfNotSure) {
  Findings findings;
  Observations seen = Sound();
  seen.noise_of_increment = 1.25;
  seen.deviation_of_increment = 0.05;  // few bins
  EXPECT_THAT(findings.Look(Plain(), seen), IsEmpty());
  seen = Sound();
  seen.noise_of_increment = 2;
  seen.noise_before.from_increments = false;  // read from one snapshot
  EXPECT_THAT(findings.Look(Plain(), seen), IsEmpty());
}

TEST(Findings, AnAmplitudeLossIsNamedFromWhereItBegan) {
  for (const auto& [ratio, severity] : {std::pair(0.85, v1::WARNING), std::pair(0.75, v1::HIGH)}) {
    Findings findings;
    Observations seen = Sound();
    seen.amplitude_change = AmplitudeChange{ratio, 512, 8};
    const auto found = findings.Look(Plain(), seen);
    ASSERT_THAT(KindsOf(found), ElementsAre(v1::AMPLITUDE_LOSS)) << ratio;
    EXPECT_EQ(found[0].severity(), severity);
    EXPECT_EQ(found[0].since_scan(), 513u);
    EXPECT_THAT(found[0].detail(), HasSubstr("look at tuning, lock"));
  }
  // A gain of amplitude, or a little less of it, is no loss.
  Findings findings;
  Observations seen = Sound();
  for (const double ratio : {1.3, 0.95}) {
    seen.amplitude_change = AmplitudeChange{ratio, 512, 8};
    EXPECT_THAT(findings.Look(Plain(), seen), IsEmpty());
  }
}

TEST(Findings, ALossThatGrowsIsSaidAnewAndOnce) {
  Findings findings;
  Observations seen = Sound();
  seen.amplitude_change = AmplitudeChange{0.88, 512, 6};
  EXPECT_EQ(findings.Look(Plain(), seen)[0].severity(), v1::WARNING);
  seen.amplitude_change = AmplitudeChange{0.6, 600, 20};
  const auto found = findings.Look(Plain(), seen);
  ASSERT_EQ(found.size(), 1u);
  EXPECT_EQ(found[0].severity(), v1::HIGH);
  EXPECT_THAT(found[0].detail(), HasSubstr("40 %"));
}

TEST(Findings, ALostLockComesFirstAndLastsAsLongAsItIsLost) {
  Findings findings;
  v1::Snapshot snapshot = Plain();
  snapshot.set_lock_level(0.9);
  EXPECT_THAT(findings.Look(snapshot, Sound(0, 64)), IsEmpty());
  snapshot.set_lock_level(0.3);
  Observations seen = Sound(64, 128);
  seen.amplitude_change = AmplitudeChange{0.5, 64, 30};
  auto found = findings.Look(snapshot, seen);
  ASSERT_THAT(KindsOf(found), ElementsAre(v1::LOCK_LOSS, v1::AMPLITUDE_LOSS));
  EXPECT_EQ(found[0].since_scan(), 65u);
  EXPECT_EQ(found[0].severity(), v1::HIGH);
  EXPECT_THAT(found[0].detail(), HasSubstr("30 %"));
  found = findings.Look(snapshot, Sound(128, 192));
  EXPECT_EQ(found[0].since_scan(), 65u) << "since it was lost, not since the last look";
  snapshot.set_lock_level(0.85);
  EXPECT_THAT(KindsOf(findings.Look(snapshot, Sound(192, 256))), ElementsAre(v1::AMPLITUDE_LOSS));
  snapshot.set_lock_level(0);
  EXPECT_EQ(findings.Look(snapshot, Sound(256, 320))[0].since_scan(), 257u);
}

TEST(Findings, QuietBinsThatGrowFasterThanTheRootAreASpur) {
  Findings findings;
  Observations seen = Sound();
  seen.noise_growth.set_estimate(0.8);
  seen.noise_growth.set_lower(0.7);
  seen.noise_growth.set_upper(0.9);
  const auto found = findings.Look(Plain(), seen);
  ASSERT_THAT(KindsOf(found), ElementsAre(v1::COHERENT_SPUR));
  EXPECT_THAT(found[0].detail(), HasSubstr("power 0.80 (95 %: 0.70 to 0.90)"));
  seen.strong_lines = true;  // their feet grow so too
  EXPECT_THAT(findings.Look(Plain(), seen), IsEmpty());
  seen.strong_lines = false;
  seen.noise_growth.set_lower(0.55);
  EXPECT_THAT(findings.Look(Plain(), seen), IsEmpty()) << "not sure";
}

TEST(Findings, ANoiseWindowWithStructureIsNamed) {
  Findings findings;
  Observations seen = Sound();
  seen.window_excess = 1.29;
  const auto found = findings.Look(Plain(), seen);
  ASSERT_THAT(KindsOf(found), ElementsAre(v1::NOISE_STRUCTURE));
  EXPECT_THAT(found[0].detail(), HasSubstr("1.29 times"));
  seen.window_deviation = 0.1;  // few points: could be chance
  EXPECT_THAT(findings.Look(Plain(), seen), IsEmpty());
}

TEST(Findings, WhatIsNotKnownYetIsANote) {
  Findings findings;
  Observations seen = Sound(0, 64);
  seen.noise.from_increments = false;
  seen.noise_of_increment = 0;
  seen.seconds_per_scan = 0;
  const auto found = findings.Look(Plain(), seen);
  ASSERT_THAT(KindsOf(found), ElementsAre(v1::SINGLE_SNAPSHOT_NOISE, v1::UNKNOWN_TIME_PER_SCAN));
  for (const v1::Finding& finding : found) EXPECT_EQ(finding.severity(), v1::NOTE);
  EXPECT_THAT(findings.Look(Plain(), Sound()), IsEmpty()) << "gone once they are known";
}

TEST(Findings, SavedAndRestoredTheyStand) {
  Findings findings;
  v1::Snapshot snapshot = Plain();
  snapshot.set_receiver_gain_db(30);
  snapshot.set_lock_level(0.9);
  Observations seen = Sound();
  seen.amplitude_change = AmplitudeChange{0.5, 64, 30};
  findings.Look(snapshot, seen);
  snapshot.set_lock_level(0.2);
  findings.Look(snapshot, Sound(128, 192));
  state::Run saved;
  findings.SaveTo(saved);
  Findings restored;
  restored.RestoreFrom(saved);
  snapshot.set_receiver_gain_db(24);
  const auto before = findings.Look(snapshot, Sound(192, 256));
  const auto after = restored.Look(snapshot, Sound(192, 256));
  ASSERT_THAT(KindsOf(after), ElementsAre(v1::LOCK_LOSS, v1::AMPLITUDE_LOSS, v1::GAIN_CHANGE));
  ASSERT_EQ(before.size(), after.size());
  for (std::size_t i = 0; i < after.size(); ++i) {
    EXPECT_EQ(after[i].SerializeAsString(), before[i].SerializeAsString());
  }
}

}  // namespace
}  // namespace lastscan::engine
