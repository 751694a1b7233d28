// Sets the log up: journal, standard error or a rotating file.
#pragma once

#include <stdexcept>
#include <string>

#include "lastscan/v1/settings.pb.h"

namespace lastscan::service {

// The log cannot be written. what() is one line: what, where, what to do.
class LogError : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

// Makes spdlog's default logger write where `settings` say. "journal" means
// standard error: under the service manager each line begins with its priority
// as the journal reads it, by hand lines are plain. Throws LogError.
void StartLog(const v1::LogSettings& settings);

// The cautions in full, the version and where the daemon listens.
void LogStart(const v1::Settings& settings, const std::string& version);

}  // namespace lastscan::service
