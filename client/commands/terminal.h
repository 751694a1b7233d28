// How the commands speak: one line for an error, advice as lines or as JSON,
// cautions with every output, and a progress display where something takes long.
#pragma once

#include <chrono>
#include <cstddef>
#include <set>
#include <string>
#include <string_view>

#include "drawing/advice_text.h"
#include "lastscan/v1/advice.pb.h"

namespace lastscan::commands {

// The style for a file descriptor: colours only on a terminal that has them and
// while NO_COLOR is empty; the terminal's width, or 100 columns elsewhere.
drawing::Style StyleOf(int descriptor);

// `text` on one line and safe on a terminal, so that a name in a file cannot
// move the cursor or forge a second line.
std::string OneLine(std::string_view text);

// "lastscan: <text>" as one line on standard error.
void Complain(std::string_view text);

// Complains about files, each reason once: the same reason for many files is
// said for the first of them, with a count at the end.
class FileComplaints {
 public:
  void Add(const std::string& file, const std::string& reason);
  // Says how many more files had reasons already said.
  void Close();
  bool any() const { return count_ > 0; }

 private:
  std::set<std::string> said_;
  std::size_t count_ = 0;
  std::size_t unsaid_ = 0;
};

// Prints advice to standard output: one line each or JSON Lines. JSON holds the
// cautions in every line; plain lines are followed by them once, at Close.
class AdvicePrinter {
 public:
  explicit AdvicePrinter(bool json);
  void Print(const v1::Advice& advice, std::string_view before = {});
  // The advice in full, cautions included; Close then adds none. As JSON: as Print.
  void PrintInFull(const v1::Advice& advice);
  // Prints the cautions now instead of at the end: for commands without an end.
  void CautionsFirst();
  void Close();

  bool json() const { return json_; }
  const drawing::Style& style() const { return style_; }

 private:
  bool json_;
  bool cautions_due_ = true;
  drawing::Style style_;
};

// The cautions in full, wrapped at `style.width`, ended by a line feed.
std::string CautionsInFull(const drawing::Style& style);

// A progress display on standard error: nothing unless that is a terminal and
// the work takes more than a second; gone when the work is done.
class Progress {
 public:
  Progress(std::string what, std::size_t total);
  ~Progress();
  Progress(const Progress&) = delete;
  Progress& operator=(const Progress&) = delete;

  void At(std::size_t done);
  // Takes the display off the terminal, so that other lines can be printed.
  void Hide();

 private:
  std::string what_;
  std::size_t total_;
  bool on_terminal_;
  bool shown_ = false;
  std::chrono::steady_clock::time_point started_;
  std::chrono::steady_clock::time_point drawn_;
};

}  // namespace lastscan::commands
