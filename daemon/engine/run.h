// One run, from its first snapshot to its last: the whole flow on one page.
//
//   snapshot -> admission (can it be true?) -> spectrum (one transform)
//            -> sensitivity (noise from increments, confirmed lines, readings)
//            -> forecast (root of scans, stop boundary) -> advice (verdict)
//
// The engine is pure: no clock, no sockets, no files, no logging. The same
// snapshots in the same order give the same advice, bit for bit, and a run
// that was saved and loaded goes on as if it had never stopped.
#pragma once

#include <memory>
#include <string>
#include <string_view>

#include "lastscan/v1/advice.pb.h"
#include "lastscan/v1/settings.pb.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

// The settings the engine has when nobody says otherwise: goals per nucleus,
// assurance 0.95, tolerance 0.10, false confirmation 0.01, out of reach below
// 0.05. config/lastscan.toml shows the same values.
v1::EngineSettings DefaultSettings();

class Run {
 public:
  // Throws Refusal if a value in `settings` is impossible.
  explicit Run(v1::EngineSettings settings);
  ~Run();
  Run(Run&&) noexcept;
  Run& operator=(Run&&) noexcept;

  // Judges one snapshot. `samples` is its raw frame as snapshot.encoding says:
  // little-endian, complex points as interleaved pairs.
  // REQUIRES: snapshots of one run, in the order of their scans.
  // Throws Refusal, with nothing changed, when the snapshot cannot be true:
  // scans going backwards or standing still, another number of points, a
  // changed spectral width, nucleus or broadening, samples that are not finite,
  // sizes that disagree, a goal outside the spectrum.
  // Cost: one transform of the zero-filled length and a few passes over its
  // bins, whatever the number of snapshots before. Returned advice stays valid
  // until the next call.
  const v1::Advice& Admit(const v1::Snapshot& snapshot, std::string_view samples);

  // The latest advice; empty before the first snapshot.
  const v1::Advice& advice() const;

  // The run's whole state, and a run from it. Load throws Refusal if `state`
  // was not written by Save or is damaged.
  std::string Save() const;
  static Run Load(v1::EngineSettings settings, std::string_view state);

 private:
  class State;
  std::unique_ptr<State> state_;
};

}  // namespace lastscan::engine
