// Output shared by the commands: see terminal.h.
#include "commands/terminal.h"

#include <sys/ioctl.h>
#include <unistd.h>

#include <algorithm>
#include <cstdlib>
#include <iostream>

#include "commands/json_line.h"
#include "drawing/escape.h"
#include "drawing/wrap.h"
#include "engine/advice/cautions.h"

namespace lastscan::commands {

namespace {

// Whether the locale writes more than ASCII. An empty variable counts as unset.
bool WritesUnicode() {
  for (const char* name : {"LC_ALL", "LC_CTYPE", "LANG"}) {
    const char* value = std::getenv(name);
    if (value == nullptr || *value == '\0') continue;
    const std::string_view locale(value);
    return locale.find("UTF-8") != std::string_view::npos ||
           locale.find("utf8") != std::string_view::npos;
  }
  return false;
}

}  // namespace

drawing::Style StyleOf(int descriptor) {
  drawing::Style style;
  style.plain = !WritesUnicode();
  style.width = 100;
  if (!isatty(descriptor)) return style;
  const char* no_colour = std::getenv("NO_COLOR");
  const char* terminal = std::getenv("TERM");
  style.colour = (no_colour == nullptr || *no_colour == '\0') && terminal != nullptr &&
                 std::string_view(terminal) != "dumb";
  winsize size{};
  style.width = 80;
  if (ioctl(descriptor, TIOCGWINSZ, &size) == 0 && size.ws_col > 0) style.width = size.ws_col;
  return style;
}

std::string OneLine(std::string_view text) {
  std::string line(text);
  std::replace_if(
      line.begin(), line.end(), [](char c) { return c == '\n' || c == '\t'; }, ' ');
  line.resize(line.find_last_not_of(' ') + 1);
  return drawing::ForTerminal(line);
}

void Complain(std::string_view text) {
  std::cout.flush();
  std::cerr << "lastscan: " << OneLine(text) << std::endl;
}

void FileComplaints::Add(const std::string& file, const std::string& reason) {
  ++count_;
  if (!said_.insert(reason).second) {
    ++unsaid_;
    return;
  }
  // Readers name the file themselves; the engine and the daemon do not know it.
  Complain(reason.find(file) == std::string::npos ? file + ": " + reason : reason);
}

void FileComplaints::Close() {
  if (unsaid_ > 0) {
    Complain(unsaid_ == 1
                 ? "1 more file was left out for a reason given above"
                 : std::to_string(unsaid_) + " more files were left out for reasons given above");
  }
  unsaid_ = 0;
}

AdvicePrinter::AdvicePrinter(bool json) : json_(json), style_(StyleOf(STDOUT_FILENO)) {}

void AdvicePrinter::Print(const v1::Advice& advice, std::string_view before) {
  if (json_) {
    std::cout << JsonLine(advice) << std::endl;
  } else {
    std::cout << before << drawing::AdviceLine(advice, style_) << std::endl;
  }
}

void AdvicePrinter::PrintInFull(const v1::Advice& advice) {
  if (json_) return Print(advice);
  std::cout << drawing::AdviceInFull(advice, style_) << std::flush;
  cautions_due_ = false;
}

void AdvicePrinter::CautionsFirst() {
  if (!json_ && cautions_due_) std::cout << CautionsInFull(style_) << std::endl;
  cautions_due_ = false;
}

void AdvicePrinter::Close() {
  if (!json_ && cautions_due_) std::cout << '\n' << CautionsInFull(style_) << std::flush;
  cautions_due_ = false;
}

std::string CautionsInFull(const drawing::Style& style) {
  std::string text;
  for (const std::string_view caution : engine::Cautions()) {
    text += drawing::Wrapped(caution, style.width, "- ", "  ");
  }
  return text;
}

Progress::Progress(std::string what, std::size_t total)
    : what_(std::move(what)),
      total_(total),
      on_terminal_(isatty(STDERR_FILENO) != 0),
      started_(std::chrono::steady_clock::now()) {}

Progress::~Progress() { Hide(); }

void Progress::At(std::size_t done) {
  if (!on_terminal_) return;
  const auto now = std::chrono::steady_clock::now();
  if (now - started_ < std::chrono::seconds(1)) return;
  if (shown_ && now - drawn_ < std::chrono::milliseconds(100)) return;
  std::cerr << "\r\033[K" << what_ << ' ' << done << " of " << total_ << std::flush;
  drawn_ = now;
  shown_ = true;
}

void Progress::Hide() {
  if (shown_) std::cerr << "\r\033[K" << std::flush;
  shown_ = false;
}

}  // namespace lastscan::commands
