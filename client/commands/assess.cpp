// lastscan assess: the daemon's engine on files of one run, without a daemon.
#include <unistd.h>

#include <memory>

#include "commands/command.h"
#include "commands/run_files.h"
#include "commands/terminal.h"
#include "engine/refusal.h"
#include "engine/run.h"

namespace lastscan::commands {
namespace {

struct AssessOptions {
  std::vector<std::string> paths;
  GoalOptions goal;
  SnapshotOptions facts;
  bool json = false;
};

int Assess(const AssessOptions& options) {
  options.goal.Check();
  FileComplaints complaints;
  std::vector<RunFile> files =
      ReadRunFiles(FindRunFiles(options.paths), options.goal, options.facts, complaints);
  for (const RunFile& file : files) {
    if (file.recording.snapshot.run() != files.front().recording.snapshot.run()) {
      throw WrongUse("the files lie in several folders (" + files.front().path + ", " + file.path +
                     "): assess one run at a time, or give --run NAME if they are one run");
    }
  }

  AdvicePrinter printer(options.json);
  engine::Run run(engine::DefaultSettings());
  std::optional<v1::Advice> latest;
  Progress progress("assessing file", files.size());
  for (std::size_t i = 0; i < files.size(); ++i) {
    progress.At(i);
    try {
      EnsureSamples(files[i], options.goal, options.facts);
      const v1::Advice& advice =
          run.Admit(files[i].recording.snapshot, formats::AsFrame(files[i].recording.samples));
      progress.Hide();
      // One behind: the latest advice is printed in full.
      if (latest) printer.Print(*latest);
      latest = advice;
      std::vector<double>().swap(files[i].recording.samples);
    } catch (const engine::Refusal& refusal) {
      progress.Hide();
      complaints.Add(files[i].path, refusal.what());
    } catch (const formats::Unreadable& error) {  // changed since it was first read
      progress.Hide();
      complaints.Add(files[i].path, error.what());
    }
  }
  progress.Hide();
  complaints.Close();
  if (latest) {
    printer.PrintInFull(*latest);
    printer.Close();
  }
  return complaints.any() || !latest ? kFailed : kDone;
}

}  // namespace

void AddAssess(CLI::App& program, Job& job) {
  auto options = std::make_shared<AssessOptions>();
  CLI::App* command = program.add_subcommand(
      "assess", "Advice on files of one run, without a daemon: one advice a snapshot");
  command->add_option("FILE", options->paths, "files, or the folder, of one run")->required();
  command->add_flag("--json", options->json, "print JSON Lines");
  options->goal.AddTo(*command);
  options->facts.AddTo(*command);
  command->footer(
      "Examples:\n"
      "  lastscan assess night/*.jdx --target 30 --planned-scans 4096\n"
      "  lastscan assess one.jdx --scans-done 512 --centre-shift 100 --window 20:60 --json");
  command->callback([options, &job] { job = [options] { return Assess(*options); }; });
}

}  // namespace lastscan::commands
