// What the daemon knows of one run, as `show`, `watch` and the page need it.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "commands/connection.h"
#include "lastscan/v1/advice.pb.h"
#include "lastscan/v1/ledger.pb.h"

namespace lastscan::commands {

struct RunView {
  std::vector<v1::Advice> history;  // in order of scans, at least the latest
  std::optional<v1::RunRecord> record;
};

// The request for one run with its earlier advice.
v1::Request RunQuestion(const std::string& run);

// Throws NoAnswer; Failure with the daemon's reason when it does not know `run`.
RunView AskForRun(Connection& connection, const std::string& run);

// From the reply to a ShowRun request. REQUIRES: reply.outcome() == ANSWERED.
RunView ViewOf(const v1::Reply& reply);

// The record's dates, verdict changes and earlier forecasts, one a line, safe
// on a terminal.
std::string RecordInWords(const v1::RunRecord& record);

}  // namespace lastscan::commands
