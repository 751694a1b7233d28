// lastscan retrace: a finished accumulation as if it were still running, and
// what the advice would have saved.
#include "rehearsal/retrace.h"

#include <google/protobuf/util/time_util.h>

#include <cmath>
#include <filesystem>
#include <iostream>
#include <memory>
#include <optional>

#include "commands/adviser.h"
#include "commands/command.h"
#include "commands/recording_writer.h"
#include "commands/run_files.h"
#include "commands/terminal.h"
#include "drawing/words.h"

namespace lastscan::commands {
namespace {

constexpr std::uint64_t kMostSeed = ~std::uint64_t{0};
constexpr int kMostLooks = 100000;

struct RetraceOptions {
  std::string path;
  std::string endpoint;
  std::string folder;
  GoalOptions goal;
  SnapshotOptions facts;
  int looks = 32;
  std::uint64_t seed = 1;
  bool feed = false;
  bool json = false;
};

// What the advice would have saved, in two or three sentences.
std::string Saving(const std::optional<v1::Advice>& first_enough, const v1::Advice& last) {
  const std::uint64_t total = last.scans_done();
  const std::string scans = std::to_string(total);
  if (!first_enough) {
    std::string text = "The advice never said enough: after all " + scans + " scans the limiting ";
    text +=
        last.limiting_line().confirmed()
            ? "line reads " + drawing::Number(last.signal_to_noise().estimate())
            : "line is not confirmed and below " + drawing::Number(last.signal_to_noise().upper());
    return text + ", the target is " + drawing::Brief(last.goal().target()) +
           ". It would have saved no scans on this run.";
  }
  const std::uint64_t done = first_enough->scans_done();
  std::string text = "The advice says enough for the first time at scan " + std::to_string(done) +
                     " of " + scans + ", with a reading of " +
                     drawing::Number(first_enough->signal_to_noise().estimate()) +
                     " for a target of " + drawing::Brief(first_enough->goal().target()) + ". ";
  if (done >= total) return text + "That is the last look: it would have saved no scans.";
  const std::uint64_t saved = total - done;
  text += "It would have saved " + std::to_string(saved) + " scans (" +
          drawing::Number(100.0 * static_cast<double>(saved) / static_cast<double>(total)) + " %)";
  if (last.seconds_per_scan() > 0) {
    text += ", " + drawing::DurationInWords(static_cast<double>(saved) * last.seconds_per_scan());
  }
  text +=
      ". All " + scans + " scans read " + drawing::Number(last.signal_to_noise().estimate()) + ".";
  return text;
}

// When the snapshot after `scans` of `total` scans would have been taken. Where
// nobody knows the time of a scan all are stamped alike, which says nothing of it.
google::protobuf::Timestamp TimeOf(std::uint64_t scans, std::uint64_t total,
                                   const google::protobuf::Timestamp& end,
                                   double seconds_per_scan) {
  using google::protobuf::util::TimeUtil;
  const double before = seconds_per_scan * static_cast<double>(total - scans);
  return end - TimeUtil::MillisecondsToDuration(std::llround(before * 1000));
}

int RetraceRun(const RetraceOptions& options) {
  options.goal.Check();
  std::error_code ignored;
  if (std::filesystem::is_directory(options.path, ignored)) {
    throw Failure(options.path + " is a folder: name the file of one finished accumulation");
  }
  const std::string run = std::filesystem::path(options.path).stem().string();
  formats::Recording finished = ReadRunFile(options.path, run, options.goal, options.facts);
  v1::Snapshot& facts = finished.snapshot;
  const std::uint64_t total = facts.scans_done();
  if (total < 2) {
    throw Failure(options.path +
                  ": one scan cannot be retraced: name a file of 2 or more scans, "
                  "or give --scans-done N if the file states them wrongly");
  }
  if (!options.facts.scans_planned()) facts.set_scans_planned(total);
  if (!facts.has_recorded_at()) {
    *facts.mutable_recorded_at() = ChangedAt(StateOf(options.path));
  }
  const google::protobuf::Timestamp end = facts.recorded_at();
  const double seconds_per_scan = facts.has_seconds_per_scan() ? facts.seconds_per_scan() : 0;

  AdvicePrinter printer(options.json);
  std::unique_ptr<Adviser> adviser;
  std::optional<RecordingWriter> writer;
  if (!options.folder.empty()) writer.emplace(options.folder, total);
  if (options.feed) adviser = std::make_unique<Adviser>(options.endpoint);
  if (!options.feed && !writer) adviser = std::make_unique<Adviser>();

  rehearsal::Retrace retrace(std::move(finished), options.seed);
  std::optional<v1::Advice> first_enough;
  v1::Advice last;
  const std::vector<std::uint64_t> looks = rehearsal::EvenLooks(total, options.looks);
  Progress progress("retracing look", looks.size());
  for (std::size_t i = 0; i < looks.size(); ++i) {
    progress.At(i);
    formats::Recording look = retrace.AdvanceTo(looks[i]);
    *look.snapshot.mutable_recorded_at() = TimeOf(looks[i], total, end, seconds_per_scan);
    look.snapshot.set_final(looks[i] == total);
    if (writer) writer->Write(look);
    if (!adviser) continue;
    last = adviser->Judge(look);
    progress.Hide();
    if (last.verdict() == v1::ENOUGH && !first_enough) first_enough = last;
    printer.Print(last);
  }
  progress.Hide();
  if (!options.json) {
    if (adviser) std::cout << '\n' << Saving(first_enough, last) << '\n';
    if (writer) {
      std::cout << looks.size() << " snapshots written to " << OneLine(options.folder) << '\n';
    }
  }
  printer.Close();
  return kDone;
}

}  // namespace

void AddRetrace(CLI::App& program, Job& job) {
  auto options = std::make_shared<RetraceOptions>();
  CLI::App* command = program.add_subcommand(
      "retrace", "Replays a finished accumulation: when would the advice have said enough?");
  command->add_option("FILE", options->path, "a finished accumulation")->required();
  command->add_option("--looks", options->looks, "snapshots to make, evenly spaced")
      ->check(CLI::Range(1, kMostLooks))
      ->capture_default_str();
  command->add_option("--seed", options->seed, "seed of the noise between the looks")
      ->check(CLI::Range(std::uint64_t{0}, kMostSeed))
      ->capture_default_str();
  command->add_option("--write", options->folder, "leave the snapshots here as JCAMP-DX files")
      ->type_name("FOLDER");
  command->add_flag("--feed", options->feed, "ask the daemon instead of assessing here");
  command->add_flag("--json", options->json, "print JSON Lines");
  AddEndpointOption(*command, options->endpoint);
  options->goal.AddTo(*command);
  options->facts.AddTo(*command);
  command->footer(
      "Examples:\n"
      "  lastscan retrace finished.jdx --target 30 --window 20:60 --seconds-per-scan 2.5\n"
      "  lastscan retrace finished.jdx --write looks/ --looks 16");
  command->callback([options, &job] { job = [options] { return RetraceRun(*options); }; });
}

}  // namespace lastscan::commands
