// Leaves recordings in a folder: see recording_writer.h.
#include "commands/recording_writer.h"

#include <algorithm>
#include <filesystem>
#include <fstream>

#include "commands/command.h"
#include "formats/jcamp_dx.h"

namespace lastscan::commands {

namespace fs = std::filesystem;

RecordingWriter::RecordingWriter(std::string folder, std::uint64_t most_scans)
    : folder_(std::move(folder)),
      digits_(std::max<std::size_t>(6, std::to_string(most_scans).size())) {
  std::error_code error;
  fs::create_directories(folder_, error);
  if (error) throw Failure(folder_ + ": the folder cannot be made: " + error.message());
}

std::string RecordingWriter::Write(const formats::Recording& recording) {
  std::string scans = std::to_string(recording.snapshot.scans_done());
  scans.insert(0, digits_ - std::min(digits_, scans.size()), '0');
  const fs::path path = fs::path(folder_) / ("scan-" + scans + ".jdx");
  const fs::path part = path.string() + ".part";
  if (fs::exists(path)) {
    throw Failure(path.string() + " exists already and is left as it is: name another folder");
  }
  std::ofstream file(part, std::ios::binary | std::ios::trunc);
  formats::WriteJcampDx(file, recording);
  file.close();
  std::error_code error;
  if (file) fs::rename(part, path, error);
  if (!file || error) {
    std::error_code ignored;
    fs::remove(part, ignored);
    throw Failure(path.string() + ": the file cannot be written: is the disk full or read-only?");
  }
  return path.string();
}

}  // namespace lastscan::commands
