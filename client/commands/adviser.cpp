// Advice from here or from the daemon: see adviser.h.
#include "commands/adviser.h"

namespace lastscan::commands {

Adviser::Adviser() : run_(std::make_unique<engine::Run>(engine::DefaultSettings())) {}

Adviser::Adviser(const std::string& endpoint)
    : connection_(std::make_unique<Connection>(endpoint)) {}

v1::Advice Adviser::Judge(const formats::Recording& recording) {
  if (run_) return run_->Admit(recording.snapshot, formats::AsFrame(recording.samples));
  const v1::Reply reply = Send(*connection_, recording);
  if (reply.outcome() != v1::ACCEPTED && reply.outcome() != v1::REPEATED) {
    throw Failure(reply.reason());
  }
  return reply.advice();
}

}  // namespace lastscan::commands
