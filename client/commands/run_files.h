// The files of runs: which files a command line names, which run each belongs
// to, and their recordings in the order of scans.
//
// One folder holds one run: a run is named after the folder that holds its
// files unless --run says otherwise.
#pragma once

#include <google/protobuf/timestamp.pb.h>

#include <string>
#include <vector>

#include "commands/follow_journal.h"
#include "commands/goal_options.h"
#include "commands/terminal.h"
#include "formats/recording.h"

namespace lastscan::commands {

struct RunFile {
  std::string path;
  std::string run;               // name of the folder that holds it
  formats::Recording recording;  // filled by ReadRunFiles
};

// Whether a file in a folder may hold data at all: hidden files, back-up copies
// and partly copied files (".part", ".tmp") may not.
bool MayHoldData(const std::string& file_name);

// The name of the folder that holds `path` (a file), or of `path` (a folder).
std::string RunNameOf(const std::string& path);

// The files that `paths` name: files themselves, and for a folder the files
// directly in it. Throws Failure if a path does not exist or a folder is empty.
std::vector<RunFile> FindRunFiles(const std::vector<std::string>& paths);

// Reads them with both kinds of options applied, and sorts them by run and then
// by scans. Files that cannot be read go to `complaints` and are left out.
// Throws WrongUse if --scans-done is given for more than one file.
std::vector<RunFile> ReadRunFiles(std::vector<RunFile> files, const GoalOptions& goal,
                                  const SnapshotOptions& facts, FileComplaints& complaints);

// One file, the same way. Throws formats::Unreadable.
formats::Recording ReadRunFile(const std::string& path, const std::string& run,
                               const GoalOptions& goal, const SnapshotOptions& facts);

// Sorts by run, and then by scans done.
void SortByScans(std::vector<RunFile>& files);

// Of a long list ReadRunFiles keeps the samples of the first files only, so that
// memory stays bounded; this reads those of `file` again where they are missing.
// Throws formats::Unreadable.
void EnsureSamples(RunFile& file, const GoalOptions& goal, const SnapshotOptions& facts);

// When a file last changed, as the time of a snapshot that states none.
google::protobuf::Timestamp ChangedAt(const FileState& state);

// Gives files that state no time one that is the same whenever they are sent:
// the oldest change among the files of their run. Files copied together tell
// nothing of the time of a scan, so they must not differ.
void StampUndated(std::vector<RunFile>& files);

// Keeps count of the samples in memory: drops those of `file` when the files
// before it hold enough already.
class SampleBudget {
 public:
  void Admit(RunFile& file);

 private:
  std::size_t values_ = 0;
};

}  // namespace lastscan::commands
