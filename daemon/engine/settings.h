// The part of the settings that the engine checks for itself.
#pragma once

#include "lastscan/v1/settings.pb.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

// Throws Refusal naming the value that is impossible.
void CheckSettings(const v1::EngineSettings& settings);

// Spectra of different broadening do not add up. Throws Refusal.
void CheckBroadening(double before, double now, const v1::Snapshot& snapshot);

}  // namespace lastscan::engine
