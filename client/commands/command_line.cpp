// The whole command line of `lastscan`: its commands, version, help and errors.
#include <google/protobuf/stubs/logging.h>

#include <exception>
#include <iostream>

#include "commands/command.h"
#include "commands/terminal.h"
#include "engine/advice/cautions.h"

namespace lastscan::commands {
namespace {

constexpr char kWhatItDoes[] =
    "lastscan: which scan is the last one this sample needs?\n"
    "Feeds snapshots of running NMR accumulations to lastscand and shows its advice.";

// Names the command whose options were wrong, so that the hint leads to the
// right help.
std::string HelpFor(const CLI::App& program) {
  for (const CLI::App* command : program.get_subcommands()) {
    return "lastscan " + command->get_name() + " --help";
  }
  return "lastscan --help";
}

// The parser would only say that a command is missing.
void RequireKnownCommand(const CLI::App& program, int argc, char** argv) {
  if (argc < 2 || argv[1][0] == '-') return;
  const auto named = [&](const CLI::App* command) { return command->get_name() == argv[1]; };
  if (!program.get_subcommands(named).empty()) return;
  throw WrongUse("there is no command \"" + std::string(argv[1]) + "\"");
}

}  // namespace

int RunCommandLine(int argc, char** argv) {
  // A broken reply is reported by us in one line; the library need not say more.
  google::protobuf::SetLogHandler(nullptr);

  CLI::App program(kWhatItDoes);
  program.name("lastscan");
  program.set_version_flag("--version", "lastscan " LASTSCAN_VERSION);
  program.set_help_flag("--help,-h", "Print this help and leave");
  program.require_subcommand(1);
  program.footer(
      "Each command has its own help: lastscan feed --help\n"
      "Exit codes: 0 done, 1 refused or failed, 2 the command line is wrong.\n" +
      std::string(engine::CautionInShort()));
  Job job;
  AddAssess(program, job);
  AddFeed(program, job);
  AddRuns(program, job);
  AddShow(program, job);
  AddWatch(program, job);
  AddPage(program, job);
  AddLedger(program, job);
  AddRetrace(program, job);
  AddRehearse(program, job);

  try {
    RequireKnownCommand(program, argc, argv);
    program.parse(argc, argv);
    const int code = job();
    std::cout.flush();
    if (!std::cout) {
      throw Failure("the output could not be written: is the disk full?");
    }
    return code;
  } catch (const CLI::ParseError& error) {
    if (error.get_exit_code() == 0) return program.exit(error);
    Complain(std::string(error.what()) + ": see " + HelpFor(program));
    return kWrongUse;
  } catch (const WrongUse& error) {
    Complain(std::string(error.what()) + ": see " + HelpFor(program));
    return kWrongUse;
  } catch (const std::exception& error) {
    Complain(error.what());
    return kFailed;
  }
}

}  // namespace lastscan::commands
