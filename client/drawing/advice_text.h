// Advice in words for a terminal: one line for logs and lists, or in full.
// Verdict first, in words a tired person understands; then the one number and
// the one time that matter; then findings and cautions.
#pragma once

#include <string>

#include "drawing/words.h"
#include "lastscan/v1/advice.pb.h"

namespace lastscan::drawing {

struct Style {
  bool colour = false;  // ANSI colours; only ever on a terminal
  int width = 80;       // columns to wrap at; less than 20 counts as 20
  bool plain = false;   // figures in ASCII, for terminals without Unicode
};

// Scans, verdict, signal-to-noise with limits, and what is next, in one line
// without a line feed.
std::string AdviceLine(const v1::Advice& advice, const Style& style);

// Everything an operator needs to decide, with findings and cautions; ends with
// a line feed.
std::string AdviceInFull(const v1::Advice& advice, const Style& style);

}  // namespace lastscan::drawing
