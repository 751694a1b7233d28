// lastscan show: one run in depth, with its figure and what the ledger keeps.
#include <iostream>
#include <memory>

#include "commands/command.h"
#include "commands/connection.h"
#include "commands/json_line.h"
#include "commands/run_view.h"
#include "commands/terminal.h"
#include "drawing/progress_figure.h"

namespace lastscan::commands {
namespace {

struct ShowOptions {
  std::string endpoint;
  std::string run;
  bool json = false;
};

int Show(const ShowOptions& options) {
  Connection connection(options.endpoint);
  const RunView view = AskForRun(connection, options.run);
  AdvicePrinter printer(options.json);
  if (!options.json) {
    const std::string record = view.record ? RecordInWords(*view.record) : std::string();
    if (!record.empty()) std::cout << record << '\n';
    if (view.history.size() > 1) {
      drawing::ProgressFigure figure{view.history, std::nullopt};
      std::cout << drawing::DrawForTerminal(figure, 16, printer.style()) << '\n';
    }
  }
  printer.PrintInFull(view.history.back());
  printer.Close();
  return kDone;
}

}  // namespace

void AddShow(CLI::App& program, Job& job) {
  auto options = std::make_shared<ShowOptions>();
  CLI::App* command = program.add_subcommand("show", "Shows one run in depth");
  command->add_option("RUN", options->run, "name of the run, as `lastscan runs` lists it")
      ->required();
  command->add_flag("--json", options->json, "print the latest advice as one JSON line");
  AddEndpointOption(*command, options->endpoint);
  command->footer("Example:\n  lastscan show night-12");
  command->callback([options, &job] { job = [options] { return Show(*options); }; });
}

}  // namespace lastscan::commands
