// The follower's memory: see follow_journal.h.
#include "commands/follow_journal.h"

#include <fcntl.h>
#include <sys/file.h>
#include <sys/stat.h>
#include <unistd.h>

#include <array>
#include <cerrno>
#include <cstdio>
#include <cstring>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <sstream>

#include "commands/command.h"

namespace lastscan::commands {
namespace {

namespace fs = std::filesystem;

constexpr char kFirstLine[] = "lastscan follow journal 1";

constexpr std::uint64_t kFnvBasis = 14695981039346656037u;
constexpr std::uint64_t kFnvPrime = 1099511628211u;

std::uint64_t Fnv(std::uint64_t hash, const char* bytes, std::size_t count) {
  for (std::size_t i = 0; i < count; ++i) {
    hash = (hash ^ static_cast<unsigned char>(bytes[i])) * kFnvPrime;
  }
  return hash;
}

std::uint64_t Fnv(std::uint64_t hash, const std::string& text) {
  return Fnv(hash, text.c_str(), text.size() + 1);  // with the closing zero
}

std::string Hex(std::uint64_t value) {
  std::array<char, 17> text{};
  std::snprintf(text.data(), text.size(), "%016llx", static_cast<unsigned long long>(value));
  return text.data();
}

// Names may hold tabs and line feeds; the journal's lines may not.
std::string Escaped(const std::string& name) {
  std::string text;
  for (const char c : name) {
    if (c == '\\') {
      text += "\\\\";
    } else if (c == '\t') {
      text += "\\t";
    } else if (c == '\n') {
      text += "\\n";
    } else {
      text += c;
    }
  }
  return text;
}

std::string Unescaped(const std::string& text) {
  std::string name;
  for (std::size_t i = 0; i < text.size(); ++i) {
    if (text[i] != '\\' || i + 1 == text.size()) {
      name += text[i];
      continue;
    }
    const char c = text[++i];
    name += c == 't' ? '\t' : c == 'n' ? '\n' : c;
  }
  return name;
}

bool WriteAll(int descriptor, const std::string& text) {
  std::size_t done = 0;
  while (done < text.size()) {
    const ssize_t written = write(descriptor, text.data() + done, text.size() - done);
    if (written < 0 && errno == EINTR) continue;
    if (written <= 0) return false;
    done += static_cast<std::size_t>(written);
  }
  return fdatasync(descriptor) == 0;
}

}  // namespace

FileState StateOf(const std::string& path) {
  struct stat status {};
  if (stat(path.c_str(), &status) != 0) return {};
  return {static_cast<std::uint64_t>(status.st_size),
          status.st_mtim.tv_sec * std::int64_t{1'000'000'000} + status.st_mtim.tv_nsec};
}

std::uint64_t Fingerprint(const std::string& run, const std::string& path) {
  std::ifstream file(path, std::ios::binary);
  std::uint64_t hash = Fnv(kFnvBasis, run);
  std::array<char, 1 << 16> block{};
  while (file) {
    file.read(block.data(), block.size());
    hash = Fnv(hash, block.data(), static_cast<std::size_t>(file.gcount()));
  }
  if (!file.eof()) throw Failure(path + ": the file cannot be read");
  return hash;
}

FollowJournal::FollowJournal(const std::string& state_folder, const std::string& folder,
                             const std::string& endpoint) {
  const fs::path home = fs::path(state_folder) / "follow";
  std::error_code error;
  fs::create_directories(home, error);
  const std::string name = fs::path(folder).filename().string();
  path_ = (home / (name + "-" + Hex(Fnv(Fnv(kFnvBasis, folder), endpoint)) + ".journal")).string();
  descriptor_ = open(path_.c_str(), O_RDWR | O_CREAT | O_APPEND | O_CLOEXEC, 0600);
  if (descriptor_ < 0) {
    throw Failure(path_ + ": the journal cannot be opened: " + std::strerror(errno) +
                  ": make it writable or set XDG_STATE_HOME");
  }
  try {
    if (flock(descriptor_, LOCK_EX | LOCK_NB) != 0) {
      throw Failure(folder + " is followed by another lastscan already: stop that one first");
    }
    std::ifstream file(path_, std::ios::binary);
    Load(std::string(std::istreambuf_iterator<char>(file), {}));
  } catch (...) {
    close(descriptor_);
    throw;
  }
}

FollowJournal::~FollowJournal() { close(descriptor_); }

void FollowJournal::Load(const std::string& text) {
  if (text.find('\n') == std::string::npos) {
    // New, or cut off in its very first line.
    if (ftruncate(descriptor_, 0) != 0 || !WriteAll(descriptor_, std::string(kFirstLine) + "\n")) {
      throw Failure(path_ + ": the journal cannot be written: " + std::strerror(errno));
    }
    return;
  }
  std::istringstream lines(text.substr(0, text.rfind('\n') + 1));
  std::string line;
  std::getline(lines, line);
  if (line != kFirstLine) {
    throw Failure(path_ +
                  ": not a journal that this version can read: move it away, what was sent "
                  "is then sent again, which does no harm");
  }
  while (std::getline(lines, line)) {
    std::istringstream fields(line);
    std::uint64_t fingerprint = 0;
    FileState state;
    std::string run;
    std::string name;
    if (!(fields >> std::hex >> fingerprint >> std::dec >> state.size >> state.changed_ns))
      continue;
    if (fields.get() != '\t' || !std::getline(fields, run, '\t') || !std::getline(fields, name)) {
      continue;
    }
    sent_.insert(fingerprint);
    looks_[{Unescaped(run), Unescaped(name)}] = state;
  }
  if (text.back() != '\n' && !WriteAll(descriptor_, "\n")) {
    throw Failure(path_ + ": the journal cannot be written: " + std::strerror(errno));
  }
}

bool FollowJournal::HoldsUnchanged(const std::string& run, const std::string& name,
                                   const FileState& state) const {
  const auto found = looks_.find({run, name});
  return found != looks_.end() && found->second == state;
}

void FollowJournal::Add(const std::string& run, const std::string& name, const FileState& state,
                        std::uint64_t fingerprint) {
  sent_.insert(fingerprint);
  looks_[{run, name}] = state;
  const std::string line = Hex(fingerprint) + "\t" + std::to_string(state.size) + "\t" +
                           std::to_string(state.changed_ns) + "\t" + Escaped(run) + "\t" +
                           Escaped(name) + "\n";
  if (!WriteAll(descriptor_, line)) {
    throw Failure(path_ + ": the journal cannot be written: " + std::strerror(errno) +
                  ": after a restart snapshots are sent again, which does no harm");
  }
}

}  // namespace lastscan::commands
