// A bench for tests of the real `lastscan`: a folder of its own with home, run
// and data folders, the client run in it, a real lastscand on request, and
// snapshot files of an invented run.
#pragma once

#include <gtest/gtest.h>
#include <sys/types.h>

#include <chrono>
#include <filesystem>
#include <functional>
#include <string>
#include <vector>

#include "formats/recording.h"
#include "rehearsal/invented_run.h"

namespace lastscan::testing {

struct Finished {
  int code = -1;  // exit code; 128 + signal if it was killed
  std::string out;
  std::string err;
};

// A program that runs until it is stopped. Its output is in files.
class Running {
 public:
  Running() = default;
  Running(pid_t process, std::filesystem::path out, std::filesystem::path err);
  Running(Running&& other) noexcept;
  Running& operator=(Running&& other) noexcept;
  ~Running();  // kills what still runs

  std::string out() const;
  std::string err() const;
  // Sends `signal` and waits for the end.
  Finished Stop(int signal);
  // Waits for the end.
  Finished Wait();
  pid_t process() const { return process_; }

 private:
  pid_t process_ = -1;
  std::filesystem::path out_;
  std::filesystem::path err_;
};

class ClientBench : public ::testing::Test {
 protected:
  void SetUp() override;
  void TearDown() override;

  // The real client with these arguments, to its end.
  Finished Client(const std::vector<std::string>& arguments);
  Running StartClient(const std::vector<std::string>& arguments);
  // A real daemon that already answers.
  Running StartDaemon();

  std::string Path(const std::string& name) const { return (folder_ / name).string(); }
  // Writes `text` to a file and returns its path.
  std::string Write(const std::string& name, const std::string& text);
  // Writes a recording as JCAMP-DX and returns its path.
  std::string Write(const std::string& name, const formats::Recording& recording);
  std::string Read(const std::string& path) const;

  // One strong line, 2,048 points: enough for advice, small enough to be quick.
  static rehearsal::InventedSample Sample();

  // True once `condition` is, within `limit`.
  static bool Within(std::chrono::milliseconds limit, const std::function<bool()>& condition);

  std::filesystem::path folder_;

 private:
  Running Start(const std::string& program, const std::vector<std::string>& arguments);
  int started_ = 0;
};

// True if `text` is exactly one line that begins with "lastscan: ".
::testing::AssertionResult IsOneErrorLine(const std::string& text);

}  // namespace lastscan::testing
