#include "engine/advice/findings.h"

#include <algorithm>
#include <cmath>

#include "engine/advice/wording.h"

namespace lastscan::engine {
namespace {

v1::Finding Make(v1::FindingKind kind, v1::Severity severity, double since, std::string detail) {
  v1::Finding finding;
  finding.set_kind(kind);
  finding.set_severity(severity);
  finding.set_since_scan(static_cast<std::uint64_t>(since));
  finding.set_detail(std::move(detail));
  return finding;
}

constexpr double kStep = 0.15;       // a noise step of less is weather
constexpr double kGrossStep = 0.4;   // of more calls for a look at once
constexpr double kLoss = 0.10;       // an amplitude loss worth a word
constexpr double kGrossLoss = 0.20;  // and one worth a walk to the magnet
constexpr double kLostLock = 0.5;    // share of the best lock level

}  // namespace

bool Findings::Stands(v1::FindingKind kind) const {
  return std::any_of(standing_.begin(), standing_.end(),
                     [&](const v1::Finding& finding) { return finding.kind() == kind; });
}

void Findings::Stand(v1::Finding finding) {
  if (!Stands(finding.kind())) standing_.push_back(std::move(finding));
}

std::vector<v1::Finding> Findings::Look(const v1::Snapshot& snapshot, const Observations& seen) {
  const double since = seen.scans_before + 1;

  // Gain and noise: a change of receiver gain scales signal and noise alike.
  bool gain_changed = false;
  if (snapshot.has_receiver_gain_db()) {
    if (receiver_gain_db_ && std::abs(*receiver_gain_db_ - snapshot.receiver_gain_db()) > 0.05) {
      gain_changed = true;
      Stand(Make(v1::GAIN_CHANGE, v1::HIGH, since,
                 "the receiver gain went from " + Rounded(*receiver_gain_db_) + " to " +
                     Rounded(snapshot.receiver_gain_db()) +
                     " dB within the run: scans before and after do not add up; start the run "
                     "again with one gain"));
    }
    receiver_gain_db_ = snapshot.receiver_gain_db();
  }
  // Once the level has stepped, what came before is no measure any more.
  if (seen.noise_of_increment > 0 && seen.noise_before.from_increments && !gain_changed &&
      !Stands(v1::GAIN_CHANGE) && !Stands(v1::NOISE_STEP)) {
    const double ratio = seen.noise_of_increment / seen.noise_before.per_scan;
    const double limit = std::max(kStep, 6 * seen.deviation_of_increment);
    if (std::abs(ratio - 1) > limit) {
      // The amplitude was read in the increment's own noise, not that of before.
      const double deviation = seen.amplitude_deviation * ratio;
      const bool follows =
          seen.relative_amplitude && deviation < 0.2 * std::abs(ratio - 1) &&
          std::abs(*seen.relative_amplitude - ratio) < std::max(4 * deviation, 0.05 * ratio);
      if (follows) {
        Stand(Make(v1::GAIN_CHANGE, v1::HIGH, since,
                   "signal and noise of one scan changed together by a factor of " +
                       Rounded(ratio) +
                       ": look whether the receiver gain was changed; scans before and after do "
                       "not add up, start the run again with one gain"));
      } else {
        Stand(Make(v1::NOISE_STEP, std::abs(ratio - 1) > kGrossStep ? v1::HIGH : v1::WARNING, since,
                   "the noise of one scan changed by a factor of " + Rounded(ratio) +
                       " while the signal did not follow: look at the preamplifier, at "
                       "decoupling and at new sources of interference"));
      }
    }
  }

  // Amplitude: the same lines give less per scan than before.
  if (seen.amplitude_change && !Stands(v1::GAIN_CHANGE) &&
      1 - seen.amplitude_change->ratio > kLoss) {
    const double loss = 1 - seen.amplitude_change->ratio;
    std::erase_if(standing_, [](const auto& f) { return f.kind() == v1::AMPLITUDE_LOSS; });
    Stand(Make(v1::AMPLITUDE_LOSS, loss > kGrossLoss ? v1::HIGH : v1::WARNING,
               seen.amplitude_change->since_scan + 1,
               "the lines give " + Percent(std::min(loss, 1.0)) +
                   " less signal per scan than before at their places: look at tuning, lock, "
                   "field drift, sample level and whether the sample decomposes"));
  }

  std::vector<v1::Finding> findings = standing_;

  // Lock: a state, not an event; it is a finding as long as it lasts.
  if (snapshot.has_lock_level()) {
    highest_lock_level_ = std::max(highest_lock_level_, snapshot.lock_level());
    const bool lost =
        snapshot.lock_level() < kLostLock * highest_lock_level_ || snapshot.lock_level() < 0.05;
    if (!lost) lock_lost_since_ = 0;
    if (lost && lock_lost_since_ == 0) lock_lost_since_ = since;
    if (lost) {
      // In front: what a lost lock does to amplitudes follows from it.
      findings.insert(findings.begin(),
                      Make(v1::LOCK_LOSS, v1::HIGH, lock_lost_since_,
                           "the lock level is " + Percent(snapshot.lock_level()) + ", after " +
                               Percent(highest_lock_level_) +
                               " at its best: look at the lock before more scans are added"));
    }
  }
  if (seen.noise_growth.lower() > 0.6 && !seen.strong_lines && !Stands(v1::GAIN_CHANGE) &&
      !Stands(v1::NOISE_STEP)) {
    findings.push_back(Make(v1::COHERENT_SPUR, v1::WARNING, since,
                            "the quiet part of the spectrum grows as scans to the power " +
                                Rounded(seen.noise_growth.estimate()) +
                                " (95 %: " + Rounded(seen.noise_growth.lower()) + " to " +
                                Rounded(seen.noise_growth.upper()) +
                                ") where noise grows to the power 0.5: something coherent adds "
                                "up; look for interference and at the phase cycle"));
  }
  if (seen.window_excess > 1.05 + 3 * seen.window_deviation) {
    findings.push_back(Make(v1::NOISE_STRUCTURE, v1::WARNING, since,
                            "the noise window reads " + Rounded(seen.window_excess) +
                                " times the noise that the increments explain: it holds structure "
                                "(a line's foot, a rolling base line) that more scans do not "
                                "average away; choose a quieter window"));
  }
  if (!seen.noise.from_increments) {
    findings.push_back(Make(v1::SINGLE_SNAPSHOT_NOISE, v1::NOTE, 1,
                            "one snapshot only: the noise is read from its quietest regions; a "
                            "second snapshot will measure it"));
  }
  if (seen.seconds_per_scan <= 0) {
    findings.push_back(Make(v1::UNKNOWN_TIME_PER_SCAN, v1::NOTE, 1,
                            "the time of one scan is not known yet, so there are no clock times; "
                            "a second snapshot, or seconds per scan, will give them"));
  }
  return findings;
}

void Findings::SaveTo(state::Run& state) const {
  for (const v1::Finding& finding : standing_) *state.add_standing() = finding;
  state.set_highest_lock_level(highest_lock_level_);
  state.set_lock_lost_since(lock_lost_since_);
  if (receiver_gain_db_) state.set_receiver_gain_db(*receiver_gain_db_);
}

void Findings::RestoreFrom(const state::Run& state) {
  standing_.assign(state.standing().begin(), state.standing().end());
  highest_lock_level_ = state.highest_lock_level();
  lock_lost_since_ = state.lock_lost_since();
  receiver_gain_db_.reset();
  if (state.has_receiver_gain_db()) receiver_gain_db_ = state.receiver_gain_db();
}

}  // namespace lastscan::engine
