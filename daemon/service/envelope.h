// What must be true of a request before anything is done with it.
#pragma once

#include <string>
#include <string_view>
#include <vector>

#include "lastscan/v1/service.pb.h"
#include "lastscan/v1/settings.pb.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::service {

// The request in `frames`: one frame, or two for a snapshot.
// Throws engine::Refusal if it is none, or larger than `settings` allow.
v1::Request OpenEnvelope(const std::vector<std::string_view>& frames,
                         const v1::ServiceSettings& settings);

// Names that ledger, log and topics can carry: run and instrument are there, no
// name is overlong or has a control character. Throws engine::Refusal.
void CheckNames(const v1::Snapshot& snapshot);

// Points, scans and times are within what can be handled. Throws engine::Refusal.
void CheckSizes(const v1::Snapshot& snapshot, const v1::ServiceSettings& settings);

// `name` cut to a readable length, control characters replaced.
std::string Printable(std::string_view name);

}  // namespace lastscan::service
