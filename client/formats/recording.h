// What a data file of a finished or partial accumulation says, whatever its
// format: a snapshot's facts as far as the file states them, and its samples.
#pragma once

#include <cstddef>
#include <stdexcept>
#include <string>
#include <string_view>
#include <vector>

#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::formats {

// A file that cannot be read, or does not say what a run needs. what() is one
// line: file, line where known, what is wrong and what to do.
class Unreadable : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

struct Recording {
  // Facts the file states; what it does not state is left at its default.
  // encoding is FLOAT64 and `points` matches `samples`. An FID is stored as
  // interleaved real and imaginary values, a spectrum as real values in the
  // order that snapshot.reversed says. accumulation is left unspecified by
  // formats that cannot state it.
  v1::Snapshot snapshot;
  bool has_centre_shift = false;  // the file states a shift reference
  std::string title;
  std::string solvent;  // as the file names it; empty when it does not
  std::vector<double> samples;
};

// The raw frame of `samples`: little-endian float64. Valid as long as `samples`
// is neither changed nor destroyed.
std::string_view AsFrame(const std::vector<double>& samples);

// Checks that `recording`, after the options of the command line were applied,
// holds what a run needs: nucleus, observe frequency, spectral width, the number
// of scans and the shift at the centre (has_centre_shift; set it when the option
// supplied one). Throws Unreadable naming `name`, the first missing fact and the
// option that supplies it.
void RequireFacts(const Recording& recording, const std::string& name);

// Reads any supported format, told by content and not by the file's name.
// Throws Unreadable when the file is missing, a folder, not a regular file,
// empty, over `largest_bytes` (refused unread), binary or of no known format,
// and whatever the reader of the format throws.
Recording ReadRecording(const std::string& path, std::size_t largest_bytes = 256u << 20);

}  // namespace lastscan::formats
