// lastscan feed: hands snapshot files to the daemon, once or as they appear.
#include <memory>

#include "commands/command.h"
#include "commands/connection.h"
#include "commands/follow.h"
#include "commands/run_files.h"
#include "commands/terminal.h"

namespace lastscan::commands {
namespace {

struct FeedOptions {
  std::vector<std::string> paths;
  std::string endpoint;
  GoalOptions goal;
  SnapshotOptions facts;
  FollowTimes times;
  bool follow = false;
  bool final = false;
  bool json = false;
};

// REQUIRES: files in order of runs and scans.
void MarkFinal(std::vector<RunFile>& files) {
  for (std::size_t i = 0; i < files.size(); ++i) {
    v1::Snapshot& snapshot = files[i].recording.snapshot;
    if (i + 1 == files.size() || files[i + 1].recording.snapshot.run() != snapshot.run()) {
      snapshot.set_final(true);
    }
  }
}

int FeedOnce(const FeedOptions& options) {
  FileComplaints complaints;
  std::vector<RunFile> files =
      ReadRunFiles(FindRunFiles(options.paths), options.goal, options.facts, complaints);
  AdvicePrinter printer(options.json);
  bool printed = false;
  if (!files.empty()) {
    Connection connection(options.endpoint);
    StampUndated(files);
    if (options.final) MarkFinal(files);
    Progress progress("sending file", files.size());
    for (std::size_t i = 0; i < files.size(); ++i) {
      progress.At(i);
      EnsureSamples(files[i], options.goal, options.facts);
      const v1::Reply reply = Send(connection, files[i].recording);
      std::vector<double>().swap(files[i].recording.samples);
      progress.Hide();
      if (reply.outcome() == v1::ACCEPTED || reply.outcome() == v1::REPEATED) {
        printer.Print(reply.advice());
        printed = true;
      } else {
        complaints.Add(files[i].path, reply.reason());
      }
    }
  }
  complaints.Close();
  if (printed) printer.Close();
  return complaints.any() ? kFailed : kDone;
}

int Feed(const FeedOptions& options) {
  options.goal.Check();
  if (!options.follow) return FeedOnce(options);
  if (options.final) {
    throw WrongUse("--final marks the last file given, but --follow goes on: give one of them");
  }
  if (options.facts.scans_done()) {
    throw WrongUse("--scans-done says the scans of one file: it cannot go with --follow");
  }
  return FollowFolders(
      {options.paths, options.endpoint, options.goal, options.facts, options.times, options.json});
}

}  // namespace

void AddFeed(CLI::App& program, Job& job) {
  auto options = std::make_shared<FeedOptions>();
  CLI::App* command =
      program.add_subcommand("feed", "Hands snapshot files to the daemon and prints its advice");
  command->add_option("FILE", options->paths, "snapshot files, or folders that hold one run each")
      ->required();
  command->add_flag("--follow", options->follow,
                    "watch the folders: send each file once, as soon as it is complete; a folder "
                    "inside a watched one is a run of its own");
  command->add_flag("--final", options->final,
                    "the accumulation has ended with the last file of each run");
  command
      ->add_option("--settle", options->times.settle_seconds,
                   "with --follow: seconds a file must not have changed before it is read")
      ->check(CLI::Range(0.05, 3600.0))
      ->capture_default_str();
  command
      ->add_option("--give-up", options->times.give_up_seconds,
                   "with --follow: seconds after which an unchanged file that still cannot be "
                   "read is reported")
      ->check(CLI::Range(0.05, 86400.0))
      ->capture_default_str();
  command
      ->add_option("--rescan", options->times.rescan_seconds,
                   "with --follow: seconds between full looks, for network folders that do not "
                   "tell of changes")
      ->check(CLI::Range(0.1, 86400.0))
      ->capture_default_str();
  command->add_flag("--json", options->json, "print JSON Lines");
  AddEndpointOption(*command, options->endpoint);
  options->goal.AddTo(*command);
  options->facts.AddTo(*command);
  command->footer(
      "Examples:\n"
      "  lastscan feed night/ --target 30 --window 20:60 --planned-scans 4096 --final\n"
      "  lastscan feed --follow exports/ --instrument hall-2 --booking-end 07:30");
  command->callback([options, &job] { job = [options] { return Feed(*options); }; });
}

}  // namespace lastscan::commands
