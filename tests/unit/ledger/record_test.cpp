// How snapshots and advice add up to a run's record, and the fingerprint.
#include "ledger/record.h"

#include <gtest/gtest.h>

#include <set>

#include "ledger/fingerprint.h"
#include "made_up.h"

namespace lastscan::ledger {
namespace {

void Add(v1::RunRecord& record, std::uint64_t scans, v1::Verdict verdict = v1::UNDECIDED) {
  const v1::Snapshot snapshot = MadeUpSnapshot(record.run(), scans);
  AddToRecord(snapshot, MadeUpAdvice(snapshot, verdict), &record);
}

v1::Finding FindingOf(v1::FindingKind kind, v1::Severity severity, std::uint64_t since) {
  v1::Finding finding;
  finding.set_kind(kind);
  finding.set_severity(severity);
  finding.set_since_scan(since);
  finding.set_detail("since " + std::to_string(since));
  return finding;
}

TEST(RecordTest, KeepsBothEndsOfTheRun) {
  v1::RunRecord record = RecordOf("a");
  Add(record, 4);
  Add(record, 8);
  EXPECT_EQ(record.started_at().seconds(), 1'800'000'010);
  EXPECT_EQ(record.last_at().seconds(), 1'800'000'020);
  EXPECT_EQ(record.snapshots(), 2U);
  EXPECT_EQ(record.scans_done(), 8U);
  EXPECT_DOUBLE_EQ(record.achieved().estimate(), 0.8);
  EXPECT_FALSE(record.ended());
}

TEST(RecordTest, NotesAVerdictOnlyWhenItChanges) {
  v1::RunRecord record = RecordOf("a");
  Add(record, 10);
  Add(record, 20);
  Add(record, 30, v1::ON_COURSE);
  Add(record, 40, v1::ON_COURSE);
  Add(record, 50, v1::UNDECIDED);
  ASSERT_EQ(record.verdicts_size(), 3);
  EXPECT_EQ(record.verdicts(1).scans_done(), 30U);
  EXPECT_EQ(record.verdicts(1).because(), "made up after 30");
  EXPECT_EQ(record.verdicts(2).verdict(), v1::UNDECIDED);
  EXPECT_EQ(record.verdict(), v1::UNDECIDED);
}

TEST(RecordTest, NotesTheForecastAtTheFirstLookAfterEachShare) {
  v1::RunRecord record = RecordOf("a");
  for (std::uint64_t scans : {50, 99, 120, 200, 250, 499, 510, 600, 1000}) Add(record, scans);
  ASSERT_EQ(record.forecasts_size(), 3);
  EXPECT_DOUBLE_EQ(record.forecasts(0).share_done(), 0.10);
  EXPECT_EQ(record.forecasts(0).scans_done(), 120U);
  EXPECT_DOUBLE_EQ(record.forecasts(0).scans_needed().estimate(), 1880);
  EXPECT_EQ(record.forecasts(1).scans_done(), 250U);
  EXPECT_EQ(record.forecasts(2).scans_done(), 510U);
}

TEST(RecordTest, InventsNoForecastThatWasNeverMade) {
  v1::RunRecord record = RecordOf("a");
  Add(record, 300);   // the 10 % mark passed unseen
  Add(record, 1000);  // the 50 % mark too, and nothing is left to forecast
  ASSERT_EQ(record.forecasts_size(), 1);
  EXPECT_DOUBLE_EQ(record.forecasts(0).share_done(), 0.25);
  v1::RunRecord unplanned = RecordOf("b");
  v1::Snapshot snapshot = MadeUpSnapshot("b", 300);
  snapshot.set_scans_planned(0);
  AddToRecord(snapshot, MadeUpAdvice(snapshot, v1::UNDECIDED), &unplanned);
  EXPECT_EQ(unplanned.forecasts_size(), 0);
}

TEST(RecordTest, KeepsFindingsThatCleared) {
  v1::RunRecord record = RecordOf("a");
  const v1::Snapshot snapshot = MadeUpSnapshot("a", 500);
  v1::Advice advice = MadeUpAdvice(snapshot, v1::INSPECT);
  *advice.add_findings() = FindingOf(v1::LOCK_LOSS, v1::HIGH, 400);
  AddToRecord(snapshot, advice, &record);
  *advice.mutable_findings(0) = FindingOf(v1::LOCK_LOSS, v1::NOTE, 450);
  *advice.add_findings() = FindingOf(v1::SHIFT_DRIFT, v1::WARNING, 300);
  AddVerdict(advice, snapshot.recorded_at(), &record);
  Add(record, 600);
  ASSERT_EQ(record.findings_size(), 2);
  EXPECT_EQ(record.findings(0).severity(), v1::HIGH);
  EXPECT_EQ(record.findings(0).since_scan(), 400U);
  EXPECT_EQ(record.findings(0).detail(), "since 450");
}

TEST(RecordTest, LosesNoFactThatALaterSnapshotLeavesOut) {
  v1::RunRecord record = RecordOf("a");
  v1::Snapshot snapshot = MadeUpSnapshot("a", 10);
  snapshot.mutable_facts()->set_probe("probe of the invented lab");
  AddToRecord(snapshot, MadeUpAdvice(snapshot, v1::UNDECIDED), &record);
  Add(record, 20);
  snapshot = MadeUpSnapshot("a", 30);
  snapshot.mutable_facts()->set_mass_mg(5);
  AddToRecord(snapshot, MadeUpAdvice(snapshot, v1::UNDECIDED), &record);
  EXPECT_EQ(record.facts().probe(), "probe of the invented lab");
  EXPECT_DOUBLE_EQ(record.facts().mass_mg(), 5);
}

TEST(RecordTest, ARunThatGoesOnAfterItsEndHasNotEnded) {
  v1::RunRecord record = RecordOf("a");
  v1::Snapshot snapshot = MadeUpSnapshot("a", 1000);
  snapshot.set_final(true);
  AddToRecord(snapshot, MadeUpAdvice(snapshot, v1::EXTEND), &record);
  EXPECT_TRUE(record.ended());
  Add(record, 1200);
  EXPECT_FALSE(record.ended());
}

TEST(FingerprintTest, DependsOnEveryPartAndOnTheBorderBetweenThem) {
  std::set<std::string> seen;
  const v1::Snapshot snapshot = MadeUpSnapshot("a", 10);
  const std::string samples(64, '\1');
  seen.insert(Fingerprint(snapshot, samples));
  EXPECT_EQ(seen.begin()->size(), 16U);
  seen.insert(Fingerprint(snapshot, samples));  // the same again
  EXPECT_EQ(seen.size(), 1U);
  std::string changed = samples;
  changed[63] ^= 1;
  seen.insert(Fingerprint(snapshot, changed));
  seen.insert(Fingerprint(snapshot, samples.substr(1)));
  seen.insert(Fingerprint(snapshot, ""));
  v1::Snapshot other = snapshot;
  other.set_receiver_gain_db(0);  // said to be 0 is not the same as not said
  seen.insert(Fingerprint(other, samples));
  seen.insert(Fingerprint(v1::Snapshot(), snapshot.SerializeAsString() + samples));
  seen.insert(Fingerprint(MadeUpSnapshot("b", 10), samples));
  EXPECT_EQ(seen.size(), 7U);
}

TEST(FingerprintTest, StaysTheSameInLaterVersions) {
  // A ledger outlives its program: this value may never change. It was computed
  // by Python's hashlib as a version 5 UUID (RFC 4122, 4.3, from memory), twice:
  // the header's in the nil name space, the samples' in that one.
  v1::Snapshot snapshot;
  snapshot.set_run("a");
  std::string hexadecimal;
  for (const char byte : Fingerprint(snapshot, "samples")) {
    char text[3];
    std::snprintf(text, sizeof text, "%02x",
                  static_cast<unsigned>(static_cast<unsigned char>(byte)));
    hexadecimal += text;
  }
  EXPECT_EQ(hexadecimal, "96076fba859d5555bf25daec4a60d6b4");
}

}  // namespace
}  // namespace lastscan::ledger
