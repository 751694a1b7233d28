// lastscan rehearse: invented runs whose truth is known, assessed here, fed to
// the daemon or written as files.
#include <cmath>
#include <ctime>
#include <filesystem>
#include <iostream>
#include <memory>
#include <thread>

#include "commands/adviser.h"
#include "commands/command.h"
#include "commands/goal_options.h"
#include "commands/recording_writer.h"
#include "commands/table.h"
#include "commands/terminal.h"
#include "drawing/words.h"
#include "rehearsal/scenarios.h"

namespace lastscan::commands {
namespace {

constexpr std::uint64_t kMostSeed = ~std::uint64_t{0};

struct RehearseOptions {
  std::string scenario;
  std::string endpoint;
  std::string folder;
  GoalOptions goal;
  SnapshotOptions facts;
  std::uint64_t seed = 1;
  double pace_seconds = 0;
  bool list = false;
  bool obey = false;
  bool feed = false;
  bool json = false;
};

void RequireKnown(const std::string& name) {
  if (rehearsal::FindScenario(name) != nullptr) return;
  std::string names;
  for (const rehearsal::Scenario& scenario : rehearsal::Scenarios()) {
    names += (names.empty() ? "" : ", ") + scenario.name;
  }
  throw WrongUse("--scenario \"" + name + "\" is unknown: choose one of " + names);
}

int List() {
  std::vector<Row> rows = {{"scenario", "story"}};
  for (const rehearsal::Scenario& scenario : rehearsal::Scenarios()) {
    rows.push_back({scenario.name, scenario.story});
  }
  std::cout << AsTable(rows, {false, false}) << '\n' << CautionsInFull(StyleOf(1));
  return kDone;
}

// The true signal-to-noise of the line that the advice is about: the one nearest
// to it. Nothing where there is no line.
std::string Truth(const rehearsal::InventedRun& run, const v1::Advice& advice) {
  const std::vector<rehearsal::InventedLine>& lines = run.truth().lines;
  std::size_t nearest = 0;
  for (std::size_t i = 1; i < lines.size(); ++i) {
    const double at = advice.limiting_line().shift_ppm();
    if (std::abs(lines[i].shift_ppm - at) < std::abs(lines[nearest].shift_ppm - at)) nearest = i;
  }
  std::string text = "truly ";
  if (lines.empty()) {
    text += "no line";
  } else {
    text +=
        drawing::Number(run.TrueSignalToNoise(nearest, static_cast<double>(advice.scans_done())));
  }
  text.resize(std::max<std::size_t>(text.size(), 13), ' ');
  return text + "| ";
}

std::string TimeInName(std::time_t time) {
  std::tm fields{};
  localtime_r(&time, &fields);
  char text[32];
  std::strftime(text, sizeof text, "%Y%m%d-%H%M%S", &fields);
  return text;
}

// The options that make `lastscan assess` and `lastscan feed` judge written
// files as this scenario means them: the files have no place for them.
std::string OptionsOf(const v1::Snapshot& snapshot) {
  const v1::Goal& goal = snapshot.goal();
  std::string text;
  if (goal.target() > 0) text += " --target " + ExactNumber(goal.target());
  for (const v1::ShiftRange& window : goal.windows()) {
    text += (goal.kind() == v1::KNOWN_LINE ? " --known-line " : " --window ") +
            ExactNumber(window.low_ppm()) + ":" + ExactNumber(window.high_ppm());
  }
  for (const v1::ShiftRange& range : goal.excluded()) {
    text += " --exclude " + ExactNumber(range.low_ppm()) + ":" + ExactNumber(range.high_ppm());
  }
  if (!goal.solvent().empty()) text += " --solvent " + goal.solvent();
  if (goal.lines() > 0) text += " --lines " + std::to_string(goal.lines());
  text += " --planned-scans " + std::to_string(snapshot.scans_planned()) + " --phase-cycle " +
          std::to_string(snapshot.phase_cycle());
  return text;
}

void Rehearse(const RehearseOptions& options, const rehearsal::Scenario& scenario,
              AdvicePrinter& printer) {
  const std::time_t started = std::time(nullptr);
  rehearsal::InventedRun run(scenario.sample, options.seed);
  if (options.feed) run.set_started_at(started);
  std::unique_ptr<Adviser> adviser;
  std::optional<RecordingWriter> writer;
  if (!options.folder.empty()) {
    writer.emplace((std::filesystem::path(options.folder) / scenario.name).string(),
                   scenario.looks.back());
  }
  if (options.feed) adviser = std::make_unique<Adviser>(options.endpoint);
  if (!options.feed && !writer) adviser = std::make_unique<Adviser>();

  if (!printer.json()) std::cout << scenario.name << ": " << scenario.story << '\n';
  v1::Snapshot facts;
  std::int64_t booking_end = 0;  // reckoned from the first look
  for (const std::uint64_t scans : scenario.looks) {
    formats::Recording look = run.AdvanceTo(scans);
    v1::Snapshot& snapshot = look.snapshot;
    // The daemon remembers runs for ever: each rehearsal is a new one to it.
    if (options.feed) snapshot.set_run(scenario.name + "-" + TimeInName(started));
    *snapshot.mutable_goal() = scenario.goal;
    if (scenario.booking_hours) {
      if (booking_end == 0) {
        const double start = static_cast<double>(snapshot.recorded_at().seconds()) -
                             static_cast<double>(scans) * scenario.sample.seconds_per_scan;
        booking_end = std::llround(start + 3600 * *scenario.booking_hours);
      }
      snapshot.mutable_booking_end()->set_seconds(booking_end);
    }
    options.goal.ApplyTo(*snapshot.mutable_goal());
    options.facts.ApplyPlanTo(snapshot);
    snapshot.set_final(scans == scenario.looks.back());
    if (scans != scenario.looks.front() && options.pace_seconds > 0) {
      std::this_thread::sleep_for(std::chrono::duration<double>(options.pace_seconds));
    }
    if (writer) writer->Write(look);
    facts = snapshot;
    if (!adviser) continue;
    const v1::Advice advice = adviser->Judge(look);
    printer.Print(advice, Truth(run, advice));
    if (options.obey && advice.verdict() == v1::ENOUGH) break;
  }
  if (printer.json()) return;
  if (adviser) std::cout << "The truth: " << scenario.truth << '\n';
  if (writer) {
    const std::string folder = (std::filesystem::path(options.folder) / scenario.name).string();
    std::cout << scenario.looks.size() << " snapshots written; to assess them:\n  lastscan assess "
              << OneLine(folder) << OptionsOf(facts) << '\n';
  }
}

int RehearseAll(const RehearseOptions& options) {
  options.goal.Check();
  if (options.list) return List();
  if (!options.scenario.empty()) RequireKnown(options.scenario);
  if (options.facts.run() && options.scenario.empty()) {
    throw WrongUse("--run names one run: give --scenario NAME too");
  }
  AdvicePrinter printer(options.json);
  bool first = true;
  for (const rehearsal::Scenario& scenario : rehearsal::Scenarios()) {
    if (!options.scenario.empty() && scenario.name != options.scenario) continue;
    if (!first && !printer.json()) std::cout << '\n';
    first = false;
    Rehearse(options, scenario, printer);
  }
  printer.Close();
  return kDone;
}

}  // namespace

void AddRehearse(CLI::App& program, Job& job) {
  auto options = std::make_shared<RehearseOptions>();
  CLI::App* command = program.add_subcommand(
      "rehearse", "Invented runs with known truth: what does the advice say, and is it right?");
  command->add_option("--scenario", options->scenario, "only this one")->type_name("NAME");
  command->add_flag("--list", options->list, "list the scenarios and leave");
  command->add_flag("--obey", options->obey, "end a run when the advice says enough");
  command->add_option("--seed", options->seed, "seed of all noise")
      ->check(CLI::Range(std::uint64_t{0}, kMostSeed))
      ->capture_default_str();
  command
      ->add_option("--write", options->folder,
                   "leave the snapshots as JCAMP-DX files, a folder in here for each scenario")
      ->type_name("FOLDER");
  command->add_flag("--feed", options->feed, "feed the daemon instead of assessing here");
  command->add_option("--pace", options->pace_seconds, "seconds between snapshots")
      ->type_name("SECONDS")
      ->check(CLI::Range(0.0, 86400.0));
  command->add_flag("--json", options->json, "print JSON Lines");
  AddEndpointOption(*command, options->endpoint);
  options->goal.AddTo(*command);
  options->facts.AddTo(*command);
  command->footer(
      "Examples:\n"
      "  lastscan rehearse --list\n"
      "  lastscan rehearse --scenario NAME --feed --pace 0.5\n"
      "  lastscan rehearse --write exports/ --seed 7");
  command->callback([options, &job] { job = [options] { return RehearseAll(*options); }; });
}

}  // namespace lastscan::commands
