// What a follower has sent and the daemon has acknowledged, kept in a small file
// so that each snapshot is sent once, also after a restart.
//
// The file is text, one line a snapshot, only ever appended to and forced to
// the disk line by line; a last line cut off by a crash is ignored, which costs
// no more than sending that snapshot again.
#pragma once

#include <cstdint>
#include <map>
#include <set>
#include <string>

namespace lastscan::commands {

// A file as it was when it was looked at.
struct FileState {
  std::uint64_t size = 0;
  std::int64_t changed_ns = 0;  // modification time, nanoseconds since 1970
  bool operator==(const FileState&) const = default;
};

// FileState of `path`; size 0 and time 0 if it is not there.
FileState StateOf(const std::string& path);

// Fingerprint of a snapshot: the run it was sent for and the file's bytes
// (64-bit FNV-1a). Throws Failure if the file cannot be read.
std::uint64_t Fingerprint(const std::string& run, const std::string& path);

class FollowJournal {
 public:
  // The journal for `folder` and `endpoint` in `state_folder`, made when it does
  // not exist. Throws Failure when it cannot be made, belongs to a newer version
  // or another process follows the same folder for the same daemon.
  FollowJournal(const std::string& state_folder, const std::string& folder,
                const std::string& endpoint);
  ~FollowJournal();
  FollowJournal(const FollowJournal&) = delete;
  FollowJournal& operator=(const FollowJournal&) = delete;

  // Whether the snapshot with this fingerprint has been acknowledged.
  bool Holds(std::uint64_t fingerprint) const { return sent_.contains(fingerprint); }
  // Whether `name` was acknowledged when it looked just so: spares the reading.
  bool HoldsUnchanged(const std::string& run, const std::string& name,
                      const FileState& state) const;

  // Notes an acknowledged snapshot. Throws Failure when the disk refuses; the
  // snapshot is then known until the program ends.
  void Add(const std::string& run, const std::string& name, const FileState& state,
           std::uint64_t fingerprint);

  const std::string& path() const { return path_; }

 private:
  void Load(const std::string& text);

  std::string path_;
  int descriptor_ = -1;
  std::set<std::uint64_t> sent_;
  std::map<std::pair<std::string, std::string>, FileState> looks_;  // by run and name
};

}  // namespace lastscan::commands
