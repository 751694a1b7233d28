// Where the snapshots of an invented or retraced run go for advice: to the
// engine in this process, or to the daemon.
#pragma once

#include <memory>
#include <string>

#include "commands/connection.h"
#include "engine/run.h"
#include "formats/recording.h"
#include "lastscan/v1/advice.pb.h"

namespace lastscan::commands {

class Adviser {
 public:
  // Assesses here.
  Adviser();
  // Asks the daemon at `endpoint`.
  explicit Adviser(const std::string& endpoint);

  // Advice on the next snapshot of the run. Throws Failure or engine::Refusal
  // when it is refused.
  v1::Advice Judge(const formats::Recording& recording);

 private:
  std::unique_ptr<Connection> connection_;
  std::unique_ptr<engine::Run> run_;
};

}  // namespace lastscan::commands
