// One look at one spectrum: which lines stand out, what each window of the goal
// reads, and how sure that is. All in height over the rms
// noise that the increments show; other conventions are factors of that.
#pragma once

#include <optional>
#include <vector>

#include "engine/sensitivity/lines.h"
#include "engine/sensitivity/posterior.h"

namespace lastscan::engine {

// A reading with its 95 % limits.
struct Reading {
  double estimate = 0;  // freed of the upward pull of choosing: sqrt(z^2 - chosen)
  double lower = 0;
  double upper = 0;
  double deviation = 1;  // of z, with what the noise estimate adds
};

struct SurveyedLine {
  Line line;
  Reading reading;
  int window = -1;  // of the goal, -1: none
};

// What stands between a goal and being met: a window, or the K-th line.
struct Requirement {
  bool confirmed = false;
  std::optional<Line> line;      // the line read, confirmed or the likeliest one
  Reading reading;               // confirmed: of the line; else an upper limit only
  AmplitudePosterior posterior;  // of the true signal-to-noise
  int window = -1;
};

struct SurveyOptions {
  const std::vector<std::vector<BinRange>>* windows = nullptr;
  const std::vector<BinRange>* everywhere = nullptr;
  std::uint32_t lines_wanted = 0;       // 0: the windows are what is wanted
  double false_confirmation = 0.01;     // half for the windows, half for everywhere
  double noise_deviation = 0;           // relative standard deviation of the noise
  std::vector<bool> confirmed_windows;  // once confirmed, always confirmed
  std::uint32_t confirmed_lines = 0;
};

struct Survey {
  std::vector<SurveyedLine> lines;        // confirmed ones, highest first
  std::vector<Requirement> requirements;  // one a window, or one for the K-th line
  std::vector<bool> confirmed_windows;
  std::uint32_t confirmed_lines = 0;
  double strongest = 0;  // highest reading of all
};

// `lines` as ReadLines gives them for `spectrum`; `curve` as ReadingCurve.
Survey LookAt(const ScaledSpectrum& spectrum, std::span<const double> curve,
              std::span<const Line> lines, const SurveyOptions& options);

// The reading of a line at `z` after `chosen` choices.
Reading ReadingOf(double z, double chosen, double noise_deviation);

}  // namespace lastscan::engine
