#include "engine/admission.h"

#include <cmath>
#include <cstdio>

#include "engine/refusal.h"
#include "engine/spectrum/samples.h"

namespace lastscan::engine {
namespace {

std::string Number(double value) {
  char text[32];
  std::snprintf(text, sizeof text, "%.9g", value);
  return text;
}

std::string OfRun(const v1::Snapshot& snapshot) { return " of run '" + snapshot.run() + "'"; }

// A nucleus is written as mass number and symbol, "13C".
bool LooksLikeNucleus(const std::string& text) {
  std::size_t i = 0;
  while (i < text.size() && text[i] >= '0' && text[i] <= '9') ++i;
  const std::size_t letters = text.size() - i;
  return i >= 1 && i <= 3 && letters >= 1 && letters <= 2 && text[i] >= 'A' && text[i] <= 'Z' &&
         (letters == 1 || (text[i + 1] >= 'a' && text[i + 1] <= 'z'));
}

void RequirePositive(double value, const char* what, const v1::Snapshot& snapshot) {
  if (!(value > 0) || !std::isfinite(value)) {
    throw Refusal(std::string(what) + " " + Number(value) + OfRun(snapshot) +
                  " is impossible: send a number above 0");
  }
}

void RequireSame(double before, double now, const char* what, const v1::Snapshot& snapshot) {
  // Exports print some digits more or fewer; a hundredth of a per mille is no
  // other experiment.
  if (std::abs(before - now) > 1e-5 * std::abs(before)) {
    throw Refusal(std::string(what) + OfRun(snapshot) + " changed from " + Number(before) + " to " +
                  Number(now) + ": give another experiment a run name of its own");
  }
}

template <typename Value>
void RequireEqual(const Value& before, const Value& now, const char* what,
                  const v1::Snapshot& snapshot) {
  if (before != now) {
    throw Refusal(std::string(what) + OfRun(snapshot) +
                  " is not that of the snapshots before: give another experiment a run name of "
                  "its own");
  }
}

}  // namespace

void CheckSnapshot(const v1::Snapshot& snapshot, std::size_t frame_bytes) {
  if (snapshot.run().empty()) throw Refusal("the snapshot names no run: give the run a name");
  if (!LooksLikeNucleus(snapshot.nucleus())) {
    throw Refusal("nucleus '" + snapshot.nucleus() + "'" + OfRun(snapshot) +
                  " is not one: write mass number and symbol, like 13C");
  }
  RequirePositive(snapshot.observe_frequency_mhz(), "observe frequency (MHz)", snapshot);
  RequirePositive(snapshot.spectral_width_hz(), "spectral width (Hz)", snapshot);
  if (!std::isfinite(snapshot.centre_shift_ppm())) {
    throw Refusal("shift at the centre" + OfRun(snapshot) + " is not a number: send it in ppm");
  }
  if (snapshot.points() < kFewestPoints || snapshot.points() > kMostPoints) {
    throw Refusal(std::to_string(snapshot.points()) + " points" + OfRun(snapshot) +
                  " are out of range: send from " + std::to_string(kFewestPoints) + " to " +
                  std::to_string(kMostPoints));
  }
  if (snapshot.scans_done() == 0) {
    throw Refusal("scans done" + OfRun(snapshot) + " is 0: send the number of scans accumulated");
  }
  if (snapshot.accumulation() != v1::SUM && snapshot.accumulation() != v1::MEAN) {
    throw Refusal("the snapshot" + OfRun(snapshot) +
                  " does not say how scans are accumulated: send sum or mean");
  }
  const std::size_t expected = FrameBytes(snapshot);
  if (expected == 0) {
    throw Refusal("the snapshot" + OfRun(snapshot) +
                  " lacks its domain or encoding: send FID or SPECTRUM, and FLOAT32, FLOAT64 or "
                  "INT32");
  }
  if (frame_bytes != expected) {
    throw Refusal("the samples" + OfRun(snapshot) + " are " + std::to_string(frame_bytes) +
                  " bytes where " + std::to_string(snapshot.points()) + " points need " +
                  std::to_string(expected) + ": send the frame again, whole");
  }
  if (snapshot.has_receiver_delay_points() &&
      !(snapshot.receiver_delay_points() >= 0 &&
        snapshot.receiver_delay_points() < snapshot.points())) {
    throw Refusal("receiver delay " + Number(snapshot.receiver_delay_points()) + OfRun(snapshot) +
                  " is impossible: send 0 or more points, fewer than the FID has");
  }
  if (snapshot.has_seconds_per_scan()) {
    RequirePositive(snapshot.seconds_per_scan(), "seconds per scan", snapshot);
  }
  if (snapshot.has_noise_window() &&
      !(snapshot.noise_window().low_ppm() < snapshot.noise_window().high_ppm())) {
    throw Refusal("noise window" + OfRun(snapshot) +
                  " is not a range: give the lower shift first, then the higher");
  }
}

void CheckContinues(const v1::Snapshot& previous, const v1::Snapshot& snapshot) {
  RequireEqual(previous.run(), snapshot.run(), "name", snapshot);
  RequireEqual(previous.instrument(), snapshot.instrument(), "instrument", snapshot);
  RequireEqual(previous.nucleus(), snapshot.nucleus(), "nucleus", snapshot);
  RequireEqual(previous.domain(), snapshot.domain(), "domain (FID or spectrum)", snapshot);
  RequireEqual(previous.accumulation(), snapshot.accumulation(), "accumulation (sum or mean)",
               snapshot);
  RequireEqual(previous.reversed(), snapshot.reversed(), "sense of frequency", snapshot);
  if (previous.points() != snapshot.points()) {
    throw Refusal("number of points" + OfRun(snapshot) + " changed from " +
                  std::to_string(previous.points()) + " to " + std::to_string(snapshot.points()) +
                  ": give another experiment a run name of its own");
  }
  RequireSame(previous.observe_frequency_mhz(), snapshot.observe_frequency_mhz(),
              "observe frequency (MHz)", snapshot);
  RequireSame(previous.spectral_width_hz(), snapshot.spectral_width_hz(), "spectral width (Hz)",
              snapshot);
  if (std::abs(previous.centre_shift_ppm() - snapshot.centre_shift_ppm()) > 1e-3) {
    throw Refusal("shift at the centre" + OfRun(snapshot) + " changed from " +
                  Number(previous.centre_shift_ppm()) + " to " +
                  Number(snapshot.centre_shift_ppm()) +
                  " ppm: give another experiment a run name of its own");
  }
  if (snapshot.scans_done() <= previous.scans_done()) {
    throw Refusal("scans" + OfRun(snapshot) + " go from " + std::to_string(previous.scans_done()) +
                  " to " + std::to_string(snapshot.scans_done()) +
                  ": a snapshot must hold more scans than the one before; give a restarted "
                  "accumulation a run name of its own");
  }
}

}  // namespace lastscan::engine
