// The fingerprint by which a snapshot that is sent twice is known again.
#pragma once

#include <string>
#include <string_view>

#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::ledger {

// 16 bytes that depend on every field of the header and every byte of the
// samples, the same on every machine and in every later version. It guards
// against mistakes, not against a forger.
std::string Fingerprint(const v1::Snapshot& header, std::string_view samples);

}  // namespace lastscan::ledger
