// The files of runs: see run_files.h.
#include "commands/run_files.h"

#include <google/protobuf/util/time_util.h>

#include <algorithm>
#include <filesystem>
#include <map>
#include <tuple>

#include "commands/command.h"

namespace lastscan::commands {
namespace fs = std::filesystem;

namespace {

constexpr std::size_t kMostValuesKept = std::size_t{1} << 25;  // 256 MiB

}  // namespace

bool MayHoldData(const std::string& file_name) {
  return !file_name.empty() && file_name.front() != '.' && !file_name.ends_with('~') &&
         !file_name.ends_with(".part") && !file_name.ends_with(".tmp") &&
         file_name != "sample.toml";
}

std::string RunNameOf(const std::string& path) {
  std::error_code ignored;
  fs::path folder = fs::weakly_canonical(path, ignored);
  if (!fs::is_directory(folder, ignored)) folder = folder.parent_path();
  const std::string name = folder.filename().string();
  return name.empty() ? "run" : name;
}

std::vector<RunFile> FindRunFiles(const std::vector<std::string>& paths) {
  std::vector<RunFile> files;
  for (const std::string& path : paths) {
    std::error_code error;
    if (!fs::is_directory(path, error)) {
      if (!fs::exists(path, error)) throw Failure(path + ": no such file or folder");
      files.push_back({path, RunNameOf(path), {}});
      continue;
    }
    const std::size_t before = files.size();
    fs::directory_iterator entries(path, error);
    if (error) throw Failure(path + ": the folder cannot be read: " + error.message());
    for (const fs::directory_entry& entry : entries) {
      if (entry.is_regular_file(error) && MayHoldData(entry.path().filename().string())) {
        files.push_back({entry.path().string(), RunNameOf(path), {}});
      }
    }
    if (files.size() == before) {
      throw Failure(path + ": the folder holds no files: name the one with the exported data");
    }
  }
  std::sort(files.begin(), files.end(),
            [](const RunFile& a, const RunFile& b) { return a.path < b.path; });
  return files;
}

formats::Recording ReadRunFile(const std::string& path, const std::string& run,
                               const GoalOptions& goal, const SnapshotOptions& facts) {
  formats::Recording recording = formats::ReadRecording(path);
  facts.ApplyTo(recording, path, run);
  goal.ApplyTo(recording);
  return recording;
}

void SortByScans(std::vector<RunFile>& files) {
  std::stable_sort(files.begin(), files.end(), [](const RunFile& a, const RunFile& b) {
    return std::forward_as_tuple(a.recording.snapshot.run(), a.recording.snapshot.scans_done()) <
           std::forward_as_tuple(b.recording.snapshot.run(), b.recording.snapshot.scans_done());
  });
}

void EnsureSamples(RunFile& file, const GoalOptions& goal, const SnapshotOptions& facts) {
  if (file.recording.samples.empty()) {
    file.recording.samples = ReadRunFile(file.path, file.run, goal, facts).samples;
  }
}

google::protobuf::Timestamp ChangedAt(const FileState& state) {
  return google::protobuf::util::TimeUtil::NanosecondsToTimestamp(state.changed_ns);
}

void StampUndated(std::vector<RunFile>& files) {
  std::map<std::string, std::int64_t> oldest;  // by run
  for (const RunFile& file : files) {
    const auto [found, is_new] =
        oldest.try_emplace(file.recording.snapshot.run(), StateOf(file.path).changed_ns);
    if (!is_new) found->second = std::min(found->second, StateOf(file.path).changed_ns);
  }
  for (RunFile& file : files) {
    v1::Snapshot& snapshot = file.recording.snapshot;
    if (!snapshot.has_recorded_at()) {
      *snapshot.mutable_recorded_at() = ChangedAt({0, oldest[snapshot.run()]});
    }
  }
}

void SampleBudget::Admit(RunFile& file) {
  std::vector<double>& samples = file.recording.samples;
  if (values_ + samples.size() > kMostValuesKept) {
    std::vector<double>().swap(samples);
  }
  values_ += samples.size();
}

std::vector<RunFile> ReadRunFiles(std::vector<RunFile> files, const GoalOptions& goal,
                                  const SnapshotOptions& facts, FileComplaints& complaints) {
  if (facts.scans_done() && files.size() > 1) {
    throw WrongUse("--scans-done says the scans of one file, but " + std::to_string(files.size()) +
                   " files are named: give them one by one");
  }
  std::vector<RunFile> readable;
  SampleBudget budget;
  Progress progress("reading file", files.size());
  for (RunFile& file : files) {
    progress.At(readable.size());
    try {
      file.recording = ReadRunFile(file.path, file.run, goal, facts);
      budget.Admit(file);
      readable.push_back(std::move(file));
    } catch (const formats::Unreadable& error) {
      progress.Hide();
      complaints.Add(file.path, error.what());
    }
  }
  SortByScans(readable);
  return readable;
}

}  // namespace lastscan::commands
