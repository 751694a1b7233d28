// How snapshots and advice add up to the record of a run.
#pragma once

#include <google/protobuf/timestamp.pb.h>

#include "lastscan/v1/advice.pb.h"
#include "lastscan/v1/ledger.pb.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::ledger {

// Adds one snapshot and the advice it led to. An empty record becomes that of
// the run. The forecast is noted as it stood at the first look after 10, 25 and
// 50 % of the planned scans; a share that no look fell behind before the next
// one stays out, rather than being filled with a later forecast.
// REQUIRES: snapshots in the order of their scans, each with recorded_at.
void AddToRecord(const v1::Snapshot& snapshot, const v1::Advice& advice, v1::RunRecord* record);

// Adds the verdict and the findings of an advice given at `at`: a verdict only
// when it differs from the last one; of each kind of finding its highest
// severity, its earliest scan and its latest wording.
void AddVerdict(const v1::Advice& advice, const google::protobuf::Timestamp& at,
                v1::RunRecord* record);

}  // namespace lastscan::ledger
