// Tells the service manager how the daemon is.
#include "service/readiness.h"

#include <systemd/sd-daemon.h>

#include <cstdint>

namespace lastscan::service {

void TellReady(const std::string& status) { sd_notify(0, ("READY=1\nSTATUS=" + status).c_str()); }

void TellStopping() { sd_notify(0, "STOPPING=1\nSTATUS=closing the ledger"); }

void TellAlive() { sd_notify(0, "WATCHDOG=1"); }

std::optional<double> AliveEvery() {
  std::uint64_t microseconds = 0;
  if (sd_watchdog_enabled(0, &microseconds) <= 0) return std::nullopt;
  return 1e-6 * static_cast<double>(microseconds) / 2;  // half, as sd_watchdog_enabled(3) advises
}

}  // namespace lastscan::service
