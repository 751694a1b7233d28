// Signals as a file descriptor: see signals.h.
#include "commands/signals.h"

#include <sys/signalfd.h>
#include <unistd.h>

#include <cerrno>
#include <csignal>
#include <cstring>
#include <string>

#include "commands/command.h"

namespace lastscan::commands {

Signals::Signals(std::initializer_list<int> signals) {
  sigset_t set;
  sigemptyset(&set);
  for (const int signal : signals) sigaddset(&set, signal);
  pthread_sigmask(SIG_BLOCK, &set, nullptr);
  descriptor_ = signalfd(-1, &set, SFD_NONBLOCK | SFD_CLOEXEC);
  if (descriptor_ < 0) {
    throw Failure(std::string("signals cannot be waited for: ") + std::strerror(errno));
  }
}

// The signals stay blocked: one that comes while the program is leaving must
// not cut its cleaning up short.
Signals::~Signals() { close(descriptor_); }

std::optional<int> Signals::Take() {
  signalfd_siginfo info{};
  if (read(descriptor_, &info, sizeof info) != sizeof info) return std::nullopt;
  return static_cast<int>(info.ssi_signo);
}

}  // namespace lastscan::commands
