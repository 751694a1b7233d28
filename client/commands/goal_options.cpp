// Goal and snapshot options: see goal_options.h.
#include "commands/goal_options.h"

#include <map>
#include <regex>
#include <vector>

#include "commands/command.h"
#include "commands/number_option.h"
#include "commands/time_option.h"
#include "engine/refusal.h"
#include "engine/sensitivity/solvents.h"

namespace lastscan::commands {
namespace {

constexpr char kGoalGroup[] = "Goal (what is not given here stands in the settings)";
constexpr char kFactsGroup[] = "Facts of the run (over what the files state)";

constexpr std::uint64_t kMostScans = 1'000'000'000'000;
constexpr std::uint64_t kMostPhaseCycle = 1'000'000;
constexpr std::uint64_t kMostLines = 100'000;

const std::map<std::string, v1::Convention>& Conventions() {
  static const std::map<std::string, v1::Convention> names = {
      {"height-over-rms", v1::HEIGHT_OVER_RMS},
      {"height-over-twice-rms", v1::HEIGHT_OVER_TWICE_RMS},
      {"peak-to-peak", v1::PEAK_TO_PEAK}};
  return names;
}

// One option with one value, read by `read(name, text)`.
template <typename Read>
CLI::Option* AddValue(CLI::App& command, const std::string& name, const std::string& type,
                      const std::string& help, const char* group, Read read) {
  return command
      .add_option_function<std::string>(
          name, [name, read](const std::string& text) { read(name, text); }, help)
      ->type_name(type)
      ->group(group);
}

// An option that may be given again; each takes one value, so that a file name
// after it stays a file name.
template <typename Read>
void AddRepeated(CLI::App& command, const std::string& name, const std::string& type,
                 const std::string& help, const char* group, Read read) {
  command
      .add_option_function<std::vector<std::string>>(
          name,
          [name, read](const std::vector<std::string>& texts) {
            for (const std::string& text : texts) read(name, text);
          },
          help)
      ->type_name(type)
      ->allow_extra_args(false)
      ->group(group);
}

// Names travel as topics, file names and table cells.
std::string ReadName(const std::string& option, const std::string& text) {
  bool printable = !text.empty();
  for (const char c : text) {
    printable = printable && static_cast<unsigned char>(c) >= 0x20 && c != 0x7f;
  }
  if (!printable || text.size() > 200) {
    throw WrongUse(option + " must be 1 to 200 printable characters");
  }
  return text;
}

std::string ReadNucleus(const std::string& option, const std::string& text) {
  if (!std::regex_match(text, std::regex("[1-9][0-9]{0,2}[A-Z][a-z]?"))) {
    throw WrongUse(option + " must be a mass number and a symbol such as 13C, not \"" + text +
                   "\"");
  }
  return text;
}

bool IsKnownSolvent(const std::string& name) {
  try {
    engine::SolventRanges(name, "13C");
    return true;
  } catch (const engine::Refusal&) {
    return false;
  }
}

std::string ReadSolvent(const std::string& option, const std::string& text) {
  if (!IsKnownSolvent(text)) {
    throw WrongUse(option + " \"" + text + "\" is not known: name one of " +
                   engine::KnownSolvents() + ", or give its lines with --exclude LOW:HIGH");
  }
  return text;
}

}  // namespace

void GoalOptions::AddTo(CLI::App& command) {
  const auto value = [&](const std::string& name, const std::string& type, const std::string& help,
                         auto read) { AddValue(command, name, type, help, kGoalGroup, read); };
  const auto repeated = [&](const std::string& name, const std::string& help, auto add) {
    AddRepeated(command, name, "LOW:HIGH", help, kGoalGroup,
                [add](const std::string& option, const std::string& text) {
                  *add() = ReadRange(option, text);
                });
  };
  value("--target", "X", "signal-to-noise that is enough, in the convention",
        [this](auto& option, auto& text) { goal_.set_target(ReadPositive(option, text)); });
  value("--convention", "NAME", "height-over-rms, height-over-twice-rms or peak-to-peak",
        [this](auto& option, auto& text) {
          const auto found = Conventions().find(text);
          if (found == Conventions().end()) {
            throw WrongUse(option +
                           " must be height-over-rms, height-over-twice-rms or peak-to-peak, "
                           "not \"" +
                           text + "\"");
          }
          goal_.set_convention(found->second);
        });
  repeated("--window",
           "ppm; every such window must hold a line that reaches the target; repeatable",
           [this] { return goal_.add_windows(); });
  value("--known-line", "LOW:HIGH", "ppm; the line in this range must reach the target",
        [this](auto& option, auto& text) {
          goal_.set_kind(v1::KNOWN_LINE);
          *goal_.add_windows() = ReadRange(option, text);
        });
  value("--lines", "K", "at least K lines must reach the target", [this](auto& option, auto& text) {
    goal_.set_lines(static_cast<std::uint32_t>(ReadCount(option, text, kMostLines)));
  });
  repeated("--exclude", "ppm; never looked at; repeatable",
           [this] { return goal_.add_excluded(); });
  value("--solvent", "NAME",
        "its lines are never looked at; default: the one the file names; or none; known: " +
            engine::KnownSolvents(),
        [this](auto& option, auto& text) {
          no_solvent_ = text == "none";
          if (!no_solvent_) goal_.set_solvent(ReadSolvent(option, text));
        });
  value("--assurance", "P", "how sure \"enough\" must be, 0.5 to below 1",
        [this](auto& option, auto& text) { goal_.set_assurance(ReadShare(option, text)); });
  value("--tolerance", "P", "share of the target that may be missing, 0 to below 0.9",
        [this](auto& option, auto& text) { goal_.set_tolerance(ReadShare(option, text)); });
  value("--broadening", "HZ", "exponential line broadening",
        [this](auto& option, auto& text) { goal_.set_broadening_hz(ReadPositive(option, text)); });
}

void GoalOptions::Check() const {
  const bool known_line = goal_.kind() == v1::KNOWN_LINE;
  if (goal_.lines() > 0 && goal_.windows_size() > 0) {
    throw WrongUse(std::string("--lines and ") + (known_line ? "--known-line" : "--window") +
                   " are two different goals: give one of them");
  }
  if (known_line && goal_.windows_size() > 1) {
    throw WrongUse("--known-line and --window are two different goals: give one of them");
  }
}

void GoalOptions::ApplyTo(v1::Goal& goal) const {
  v1::Goal said = goal_;
  if (said.kind() == v1::GOAL_KIND_UNSPECIFIED) {
    if (said.windows_size() > 0) said.set_kind(v1::WEAKEST_WINDOW);
    if (said.lines() > 0) said.set_kind(v1::LINE_COUNT);
  }
  // What a goal looks for replaces the whole of what it looked for before;
  // appending windows to another goal's would mix the two.
  if (said.kind() != v1::GOAL_KIND_UNSPECIFIED) {
    goal.clear_windows();
    goal.clear_lines();
  }
  if (said.excluded_size() > 0) goal.clear_excluded();
  goal.MergeFrom(said);
}

void GoalOptions::ApplyTo(formats::Recording& recording) const {
  v1::Goal& goal = *recording.snapshot.mutable_goal();
  if (!no_solvent_ && !recording.solvent.empty() && IsKnownSolvent(recording.solvent)) {
    goal.set_solvent(recording.solvent);
  }
  ApplyTo(goal);
}

void SnapshotOptions::AddTo(CLI::App& command) {
  const auto value = [&](const std::string& name, const std::string& type, const std::string& help,
                         auto read) { AddValue(command, name, type, help, kFactsGroup, read); };
  value("--run", "NAME", "name of the run; default: the folder that holds the files",
        [this](auto& option, auto& text) { run_ = ReadName(option, text); });
  value("--sample", "NAME", "default: the title in the file",
        [this](auto& option, auto& text) { sample_ = ReadName(option, text); });
  value("--instrument", "NAME", "default: spectrometer",
        [this](auto& option, auto& text) { instrument_ = ReadName(option, text); });
  value("--nucleus", "NAME", "observed nucleus, such as 13C",
        [this](auto& option, auto& text) { nucleus_ = ReadNucleus(option, text); });
  value("--observe-frequency", "MHZ", "observe frequency",
        [this](auto& option, auto& text) { observe_frequency_mhz_ = ReadPositive(option, text); });
  value("--centre-shift", "PPM", "shift at the centre of the spectral width",
        [this](auto& option, auto& text) { centre_shift_ppm_ = ReadNumber(option, text); });
  value("--scans-done", "N", "scans in the accumulation; for a single file",
        [this](auto& option, auto& text) { scans_done_ = ReadCount(option, text, kMostScans); });
  value("--planned-scans", "N", "scans the run is set to",
        [this](auto& option, auto& text) { scans_planned_ = ReadCount(option, text, kMostScans); });
  value("--phase-cycle", "N", "scans in one whole phase cycle", [this](auto& option, auto& text) {
    phase_cycle_ = static_cast<std::uint32_t>(ReadCount(option, text, kMostPhaseCycle));
  });
  value("--seconds-per-scan", "S", "time of one scan, until two snapshots measure it",
        [this](auto& option, auto& text) { seconds_per_scan_ = ReadPositive(option, text); });
  value("--booking-end", "TIME", "2027-01-31T07:30:00+01:00, \"2027-01-31 07:30\" or 07:30",
        [this](auto& option, auto& text) { booking_end_ = ReadTime(option, text, now_); });
  value("--accumulated", "sum|mean", "whether samples grow with the scans; default: sum",
        [this](auto& option, auto& text) {
          if (text != "sum" && text != "mean") {
            throw WrongUse(option + " must be sum or mean, not \"" + text + "\"");
          }
          accumulation_ = text == "sum" ? v1::SUM : v1::MEAN;
        });
  value("--noise-window", "LOW:HIGH", "ppm; where the lab reads its noise",
        [this](auto& option, auto& text) { noise_window_ = ReadRange(option, text); });
  value("--receiver-delay", "POINTS", "points of build-up before an FID's first true point",
        [this](auto& option, auto& text) {
          const double points = ReadNumber(option, text);
          if (points < 0)
            throw WrongUse(option + " must be 0 or more points, not \"" + text + "\"");
          receiver_delay_points_ = points;
        });
  command.add_flag("--reversed", reversed_, "the data run the other way: low shifts for high ones")
      ->group(kFactsGroup);
}

void SnapshotOptions::ApplyTo(formats::Recording& recording, const std::string& file,
                              const std::string& run_name) const {
  v1::Snapshot& snapshot = recording.snapshot;
  if (nucleus_) snapshot.set_nucleus(*nucleus_);
  if (observe_frequency_mhz_) snapshot.set_observe_frequency_mhz(*observe_frequency_mhz_);
  if (centre_shift_ppm_) {
    snapshot.set_centre_shift_ppm(*centre_shift_ppm_);
    recording.has_centre_shift = true;
  }
  if (scans_done_) snapshot.set_scans_done(*scans_done_);
  if (accumulation_) snapshot.set_accumulation(*accumulation_);
  if (snapshot.accumulation() == v1::ACCUMULATION_UNSPECIFIED) snapshot.set_accumulation(v1::SUM);
  if (receiver_delay_points_) snapshot.set_receiver_delay_points(*receiver_delay_points_);
  if (reversed_) snapshot.set_reversed(!snapshot.reversed());
  ApplyPlanTo(snapshot);
  if (snapshot.run().empty()) snapshot.set_run(run_name);
  if (snapshot.sample().empty()) {
    snapshot.set_sample(recording.title.empty() ? snapshot.run() : recording.title);
  }
  if (snapshot.instrument().empty()) snapshot.set_instrument("spectrometer");
  formats::RequireFacts(recording, file);
}

void SnapshotOptions::ApplyPlanTo(v1::Snapshot& snapshot) const {
  if (run_) snapshot.set_run(*run_);
  if (sample_) snapshot.set_sample(*sample_);
  if (instrument_) snapshot.set_instrument(*instrument_);
  if (scans_planned_) snapshot.set_scans_planned(*scans_planned_);
  if (phase_cycle_) snapshot.set_phase_cycle(*phase_cycle_);
  if (seconds_per_scan_) snapshot.set_seconds_per_scan(*seconds_per_scan_);
  if (booking_end_) *snapshot.mutable_booking_end() = *booking_end_;
  if (noise_window_) *snapshot.mutable_noise_window() = *noise_window_;
}

}  // namespace lastscan::commands
