// Made-up snapshots and advice for tests of the ledger: plausible, but not the
// engine's.
#pragma once

#include <cstdint>
#include <string>

#include "lastscan/v1/advice.pb.h"
#include "lastscan/v1/ledger.pb.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::ledger {

// A snapshot of 13C on bench-1 after `scans` of 1,000 planned scans of 2.5 s.
inline v1::Snapshot MadeUpSnapshot(const std::string& run, std::uint64_t scans) {
  v1::Snapshot snapshot;
  snapshot.set_run(run);
  snapshot.set_instrument("bench-1");
  snapshot.set_sample("sample of " + run);
  snapshot.set_nucleus("13C");
  snapshot.set_scans_done(scans);
  snapshot.set_scans_planned(1000);
  const auto nanoseconds = scans * 2'500'000'000;
  snapshot.mutable_recorded_at()->set_seconds(
      1'800'000'000 + static_cast<std::int64_t>(nanoseconds / 1'000'000'000));
  snapshot.mutable_recorded_at()->set_nanos(static_cast<std::int32_t>(nanoseconds % 1'000'000'000));
  return snapshot;
}

inline v1::Advice MadeUpAdvice(const v1::Snapshot& snapshot, v1::Verdict verdict) {
  v1::Advice advice;
  advice.set_run(snapshot.run());
  advice.set_instrument(snapshot.instrument());
  advice.set_sample(snapshot.sample());
  advice.set_nucleus(snapshot.nucleus());
  *advice.mutable_issued_at() = snapshot.recorded_at();
  advice.set_scans_done(snapshot.scans_done());
  advice.set_scans_planned(snapshot.scans_planned());
  advice.set_verdict(verdict);
  advice.set_because("made up after " + std::to_string(snapshot.scans_done()));
  advice.mutable_goal()->set_target(10);
  const auto scans = static_cast<double>(snapshot.scans_done());
  advice.mutable_signal_to_noise()->set_estimate(scans / 10);
  advice.mutable_signal_to_noise()->set_lower(scans / 11);
  advice.mutable_signal_to_noise()->set_upper(scans / 9);
  advice.mutable_at_planned_end()->set_estimate(100 + scans);
  advice.mutable_scans_needed()->set_estimate(2000 - scans);
  return advice;
}

inline v1::RunRecord RecordOf(const std::string& run) {
  v1::RunRecord record;
  record.set_run(run);
  return record;
}

}  // namespace lastscan::ledger
