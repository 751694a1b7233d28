// lastscan runs: the latest advice of each run that the daemon knows.
#include <algorithm>
#include <iostream>
#include <memory>

#include "commands/command.h"
#include "commands/connection.h"
#include "commands/terminal.h"
#include "drawing/escape.h"

namespace lastscan::commands {
namespace {

struct RunsOptions {
  std::string endpoint;
  bool active_only = false;
  bool json = false;
};

int Runs(const RunsOptions& options) {
  Connection connection(options.endpoint);
  v1::Request request;
  request.mutable_list_runs()->set_active_only(options.active_only);
  const v1::Reply reply = AskOrFail(connection, request);
  AdvicePrinter printer(options.json);
  if (reply.runs().empty() && !options.json) {
    std::cout << (options.active_only ? "no run is active\n" : "no runs yet\n");
  }
  int widest = 0;
  for (const v1::Advice& advice : reply.runs()) {
    widest = std::max(widest, drawing::Columns(drawing::ForTerminal(advice.run())));
  }
  for (const v1::Advice& advice : reply.runs()) {
    std::string name = drawing::ForTerminal(advice.run());
    name.append(static_cast<std::size_t>(widest - drawing::Columns(name)) + 2, ' ');
    printer.Print(advice, name);
  }
  printer.Close();
  return kDone;
}

}  // namespace

void AddRuns(CLI::App& program, Job& job) {
  auto options = std::make_shared<RunsOptions>();
  CLI::App* command =
      program.add_subcommand("runs", "Lists the runs and the latest advice of each");
  command->add_flag("--active", options->active_only, "only runs that have not ended");
  command->add_flag("--json", options->json, "print JSON Lines");
  AddEndpointOption(*command, options->endpoint);
  command->footer("Example:\n  lastscan runs --active");
  command->callback([options, &job] { job = [options] { return Runs(*options); }; });
}

}  // namespace lastscan::commands
