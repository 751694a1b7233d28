// The options that feed, assess, retrace and rehearse share: the goal of a run,
// and the facts that a file does not state or states wrongly.
#pragma once

#include <CLI/CLI.hpp>
#include <ctime>
#include <optional>
#include <string>

#include "formats/recording.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::commands {

// What the command line says about the goal.
class GoalOptions {
 public:
  // Adds the options to `command`. REQUIRES: *this outlives parsing.
  // A value that cannot be meant (a target of 0, a window from high to low)
  // throws WrongUse while the command line is parsed.
  void AddTo(CLI::App& command);

  // Throws WrongUse if the options contradict each other.
  void Check() const;

  // Writes what was given over `goal`; what was not given stays as it is.
  void ApplyTo(v1::Goal& goal) const;

  // Takes the solvent that the file names, if it is a known one and the command
  // line says nothing else, and then as ApplyTo.
  void ApplyTo(formats::Recording& recording) const;

 private:
  v1::Goal goal_;
  bool no_solvent_ = false;  // --solvent none
};

// What the command line says about the snapshots of a run.
class SnapshotOptions {
 public:
  void AddTo(CLI::App& command);

  // Writes what was given over what the file states, and fills names that are
  // still missing: run from `run_name`, sample from the title or the run,
  // instrument "spectrometer". Throws formats::Unreadable naming `file`, what
  // is missing and the option that supplies it.
  void ApplyTo(formats::Recording& recording, const std::string& file,
               const std::string& run_name) const;

  // The same for a recording that was made here and lacks nothing: only names,
  // plan, booking and phase cycle are taken.
  void ApplyPlanTo(v1::Snapshot& snapshot) const;

  const std::optional<std::string>& run() const { return run_; }
  const std::optional<std::string>& instrument() const { return instrument_; }
  std::optional<double> seconds_per_scan() const { return seconds_per_scan_; }
  std::optional<std::uint64_t> scans_done() const { return scans_done_; }
  std::optional<std::uint64_t> scans_planned() const { return scans_planned_; }

  // The moment that "07:30" is counted from. Default: the clock's.
  void set_now(std::time_t now) { now_ = now; }

 private:
  std::time_t now_ = std::time(nullptr);
  std::optional<std::string> run_;
  std::optional<std::string> instrument_;
  std::optional<std::string> sample_;
  std::optional<std::string> nucleus_;
  std::optional<double> observe_frequency_mhz_;
  std::optional<double> centre_shift_ppm_;
  std::optional<std::uint64_t> scans_done_;
  std::optional<std::uint64_t> scans_planned_;
  std::optional<std::uint32_t> phase_cycle_;
  std::optional<double> seconds_per_scan_;
  std::optional<double> receiver_delay_points_;
  std::optional<google::protobuf::Timestamp> booking_end_;
  std::optional<v1::Accumulation> accumulation_;
  std::optional<v1::ShiftRange> noise_window_;
  bool reversed_ = false;
};

}  // namespace lastscan::commands
