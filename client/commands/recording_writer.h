// Leaves recordings in a folder, as a spectrometer that exports every so many
// scans would.
#pragma once

#include <string>

#include "formats/recording.h"

namespace lastscan::commands {

class RecordingWriter {
 public:
  // Makes `folder` if need be. Throws Failure if that fails.
  // `most_scans` sets how many digits the names have, so that they sort.
  RecordingWriter(std::string folder, std::uint64_t most_scans);

  // Writes FOLDER/scan-000064.jdx (JCAMP-DX), complete or not at all, and
  // returns its path. Throws Failure when it exists already or cannot be written.
  std::string Write(const formats::Recording& recording);

 private:
  std::string folder_;
  std::size_t digits_;
};

}  // namespace lastscan::commands
