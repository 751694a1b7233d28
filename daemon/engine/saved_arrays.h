// A run's saved state in bytes: its per-bin arrays inside the message, and the
// seal that shows whether any of it was torn or changed.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>

#include "engine/sensitivity/noise.h"
#include "engine/state.pb.h"

namespace lastscan::engine {

void SaveArrays(const Scatter& scatter, state::Run& saved);

// Throws Refusal if the arrays are not of `bins` bins.
void RestoreArrays(const state::Run& saved, std::size_t bins, Scatter& scatter);

// `message` with a checksum of all its bytes behind it.
std::string Sealed(std::string message);

// The message in front of the checksum. Throws Refusal when they disagree.
std::string_view Unsealed(std::string_view sealed);

}  // namespace lastscan::engine
