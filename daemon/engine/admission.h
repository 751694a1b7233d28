// The gate: a snapshot that cannot be true is refused before it touches a run.
#pragma once

#include <cstddef>

#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

// Points a spectrum or FID may have at least and at most. 2^22 complex points
// are some sixty times the longest FID in daily use.
inline constexpr std::uint32_t kFewestPoints = 64;
inline constexpr std::uint32_t kMostPoints = 1u << 22;

// Is this snapshot possible by itself? `frame_bytes` is the size of its samples.
// Throws Refusal.
void CheckSnapshot(const v1::Snapshot& snapshot, std::size_t frame_bytes);

// Can it follow `previous` in the same run? Throws Refusal.
void CheckContinues(const v1::Snapshot& previous, const v1::Snapshot& snapshot);

}  // namespace lastscan::engine
