// The per-bin arrays of a run inside its saved state, with a checksum.
#pragma once

#include <cstddef>

#include "engine/sensitivity/noise.h"
#include "engine/state.pb.h"

namespace lastscan::engine {

void SaveArrays(const Scatter& scatter, state::Run& saved);

// Throws Refusal if the arrays are not of `bins` bins or their checksum is wrong.
void RestoreArrays(const state::Run& saved, std::size_t bins, Scatter& scatter);

}  // namespace lastscan::engine
