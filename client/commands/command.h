// The commands of `lastscan`, one file each, and what they share: errors, exit
// codes and the way a command is added to the command line.
//
// Exit codes: 0 done; 1 refused or failed; 2 the command line is wrong.
// Results go to standard output, errors to standard error as one line each.
#pragma once

#include <CLI/CLI.hpp>
#include <functional>
#include <stdexcept>
#include <string>

namespace lastscan::commands {

inline constexpr int kDone = 0;
inline constexpr int kFailed = 1;
inline constexpr int kWrongUse = 2;

// The command could not do its work (exit code 1). what() is one line for a
// person: what, where, what to do.
class Failure : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

// The command line asks for something that cannot be meant (exit code 2).
class WrongUse : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

// What the chosen command does once the whole command line has been read.
// Returns the exit code.
using Job = std::function<int()>;

// Each adds its command to `program`; parsing a command line that names it
// sets `job`. REQUIRES: `job` outlives `program`.
void AddFeed(CLI::App& program, Job& job);
void AddRuns(CLI::App& program, Job& job);
void AddShow(CLI::App& program, Job& job);
void AddWatch(CLI::App& program, Job& job);
void AddAssess(CLI::App& program, Job& job);
void AddRehearse(CLI::App& program, Job& job);
void AddRetrace(CLI::App& program, Job& job);
void AddLedger(CLI::App& program, Job& job);
void AddPage(CLI::App& program, Job& job);

// Reads the command line and runs the command it names. Never throws; errors
// are printed. Returns the exit code.
int RunCommandLine(int argc, char** argv);

}  // namespace lastscan::commands
