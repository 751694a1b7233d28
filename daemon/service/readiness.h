// Tells the service manager how the daemon is: ready, alive, stopping. Without a
// service manager every call does nothing.
#pragma once

#include <optional>
#include <string>

namespace lastscan::service {

void TellReady(const std::string& status);
void TellStopping();
void TellAlive();

// How often TellAlive is expected, in seconds; nothing if it is not.
std::optional<double> AliveEvery();

}  // namespace lastscan::service
