// How snapshots and advice add up to the record of a run.
#include "ledger/record.h"

#include <algorithm>
#include <array>

namespace lastscan::ledger {
namespace {

constexpr std::array<double, 3> kShares = {0.10, 0.25, 0.50};

void AddForecast(const v1::Advice& advice, v1::RunRecord* record) {
  if (advice.scans_planned() == 0) return;
  const double share =
      static_cast<double>(advice.scans_done()) / static_cast<double>(advice.scans_planned());
  if (share >= 1.0) return;  // nothing left to forecast
  const auto next = std::upper_bound(kShares.begin(), kShares.end(), share);
  if (next == kShares.begin()) return;
  const double reached = *(next - 1);
  for (const v1::ForecastMark& mark : record->forecasts()) {
    if (mark.share_done() >= reached) return;
  }
  v1::ForecastMark* mark = record->add_forecasts();
  mark->set_share_done(reached);
  mark->set_scans_done(advice.scans_done());
  *mark->mutable_at_planned_end() = advice.at_planned_end();
  *mark->mutable_scans_needed() = advice.scans_needed();
}

}  // namespace

void AddVerdict(const v1::Advice& advice, const google::protobuf::Timestamp& at,
                v1::RunRecord* record) {
  record->set_verdict(advice.verdict());
  const int count = record->verdicts_size();
  if (count == 0 || record->verdicts(count - 1).verdict() != advice.verdict()) {
    v1::VerdictChange* change = record->add_verdicts();
    *change->mutable_at() = at;
    change->set_scans_done(advice.scans_done());
    change->set_verdict(advice.verdict());
    change->set_because(advice.because());
  }
  for (const v1::Finding& finding : advice.findings()) {
    auto* known = record->mutable_findings();
    const auto same = std::find_if(known->begin(), known->end(), [&](const v1::Finding& other) {
      return other.kind() == finding.kind();
    });
    if (same == known->end()) {
      *record->add_findings() = finding;
      continue;
    }
    same->set_severity(std::max(same->severity(), finding.severity()));
    same->set_since_scan(std::min(same->since_scan(), finding.since_scan()));
    same->set_detail(finding.detail());
  }
}

void AddToRecord(const v1::Snapshot& snapshot, const v1::Advice& advice, v1::RunRecord* record) {
  if (record->snapshots() == 0) {
    record->set_run(snapshot.run());
    record->set_instrument(snapshot.instrument());
    record->set_sample(snapshot.sample());
    record->set_nucleus(snapshot.nucleus());
    *record->mutable_started_at() = snapshot.recorded_at();
  }
  *record->mutable_last_at() = snapshot.recorded_at();
  record->set_ended(snapshot.final());
  record->set_snapshots(record->snapshots() + 1);
  record->set_scans_done(advice.scans_done());
  record->set_scans_planned(advice.scans_planned());
  record->set_scans_saved(advice.scans_saved());
  record->set_seconds_saved(advice.seconds_saved());
  // A later snapshot may state more facts than the first one; none are lost.
  if (snapshot.has_facts()) record->mutable_facts()->MergeFrom(snapshot.facts());
  *record->mutable_goal() = advice.goal();
  *record->mutable_achieved() = advice.signal_to_noise();
  AddForecast(advice, record);
  AddVerdict(advice, snapshot.recorded_at(), record);
}

}  // namespace lastscan::ledger
