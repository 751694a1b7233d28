// Reads a data file of any supported format, and checks what a run needs.
#include "formats/recording.h"

#include <algorithm>
#include <bit>
#include <cerrno>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <system_error>

#include "formats/jcamp_dx.h"

namespace lastscan::formats {
namespace {

static_assert(std::endian::native == std::endian::little, "frames are little-endian");

// All of the file, checked before it is read as far as that goes.
std::string Contents(const std::string& path, std::size_t largest_bytes) {
  namespace fs = std::filesystem;
  std::error_code error;
  const fs::file_status status = fs::status(path, error);
  if (status.type() == fs::file_type::not_found) {
    throw Unreadable(path + ": there is no such file: check the name");
  }
  if (status.type() == fs::file_type::none) {
    throw Unreadable(path + ": cannot be looked at (" + error.message() +
                     "): check the rights of the file and its folder");
  }
  if (status.type() == fs::file_type::directory) {
    throw Unreadable(path + ": is a folder, not a file: name a file in it");
  }
  if (status.type() != fs::file_type::regular) {
    throw Unreadable(path + ": is not a regular file: export the data into a file");
  }
  const std::uintmax_t size = fs::file_size(path, error);
  const auto too_large = [&](std::uintmax_t bytes) {
    return Unreadable(path + ": " + std::to_string(bytes) + " bytes are more than the " +
                      std::to_string(largest_bytes) +
                      " that are read: export one FID or spectrum a file");
  };
  if (!error && size > largest_bytes) throw too_large(size);
  std::ifstream file(path, std::ios::binary);
  if (!file) {
    throw Unreadable(path + ": cannot be opened (" + std::strerror(errno) +
                     "): check the rights of the file");
  }
  std::string text(error ? 0 : static_cast<std::size_t>(size), '\0');
  file.read(text.data(), static_cast<std::streamsize>(text.size()));
  text.resize(static_cast<std::size_t>(file.gcount()));
  if (file.bad()) {
    throw Unreadable(path + ": reading stopped after " + std::to_string(text.size()) +
                     " bytes: check the disk or the network and try again");
  }
  return text;
}

}  // namespace

std::string_view AsFrame(const std::vector<double>& samples) {
  return {reinterpret_cast<const char*>(samples.data()), samples.size() * sizeof(double)};
}

void RequireFacts(const Recording& recording, const std::string& name) {
  const v1::Snapshot& snapshot = recording.snapshot;
  const auto missing = [&](const char* fact, const char* remedy) {
    throw Unreadable(name + ": does not state " + fact + ": " + remedy);
  };
  if (snapshot.nucleus().empty()) {
    missing("the nucleus (.OBSERVE NUCLEUS)", "supply it with --nucleus NAME");
  }
  if (!(snapshot.observe_frequency_mhz() > 0)) {
    missing("the observe frequency (.OBSERVE FREQUENCY)", "supply it with --observe-frequency MHZ");
  }
  if (!(snapshot.spectral_width_hz() > 0)) {
    missing("the spectral width", "export the file with it");
  }
  if (snapshot.scans_done() == 0) {
    missing("the number of scans (.AVERAGES)", "supply it with --scans-done N");
  }
  if (!recording.has_centre_shift) {
    missing("the chemical shift of any point (.SHIFT REFERENCE)",
            "supply the shift at the centre with --centre-shift PPM");
  }
}

Recording ReadRecording(const std::string& path, std::size_t largest_bytes) {
  const std::string text = Contents(path, largest_bytes);
  if (text.empty()) {
    throw Unreadable(path + ": is empty: wait until it is written or export it again");
  }
  if (LooksLikeJcampDx(text)) return ReadJcampDx(text, path);
  const std::string_view head = std::string_view(text).substr(0, 4096);
  if (std::any_of(head.begin(), head.end(), [](char c) { return c == '\0'; })) {
    throw Unreadable(path +
                     ": holds binary data, which Lastscan does not read: export it as "
                     "JCAMP-DX");
  }
  throw Unreadable(path +
                   ": is not JCAMP-DX, for it does not begin with ##TITLE=: export the "
                   "data as JCAMP-DX");
}

}  // namespace lastscan::formats
