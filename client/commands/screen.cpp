// A redrawn terminal: see screen.h.
#include "commands/screen.h"

#include <fcntl.h>
#include <poll.h>
#include <sys/ioctl.h>
#include <unistd.h>

#include <cerrno>

#include "commands/command.h"

namespace lastscan::commands {
namespace {

// Standard control sequences (ECMA-48 and the alternate screen common to all
// terminals in use).
constexpr std::string_view kEnter = "\033[?1049h\033[?25l";
constexpr std::string_view kLeave = "\033[?25h\033[?1049l";
constexpr std::string_view kHome = "\033[H";
constexpr std::string_view kClearLine = "\033[K";

winsize Size() {
  winsize size{};
  if (ioctl(STDOUT_FILENO, TIOCGWINSZ, &size) != 0 || size.ws_col == 0 || size.ws_row == 0) {
    size.ws_col = 80;
    size.ws_row = 24;
  }
  return size;
}

void WriteOut(std::string_view text) {
  while (!text.empty()) {
    const ssize_t written = write(STDOUT_FILENO, text.data(), text.size());
    if (written < 0 && errno == EINTR) continue;
    if (written <= 0) return;
    text.remove_prefix(static_cast<std::size_t>(written));
  }
}

}  // namespace

Screen::Screen() {
  if (tcgetattr(STDIN_FILENO, &before_) != 0) {
    throw Failure("standard input is no terminal: lastscan watch needs one, or none at all");
  }
  Enter();
}

Screen::~Screen() { Leave(); }

void Screen::Enter() {
  if (entered_) return;
  termios raw = before_;
  raw.c_lflag &= ~static_cast<tcflag_t>(ICANON | ECHO);
  raw.c_cc[VMIN] = 0;
  raw.c_cc[VTIME] = 0;
  tcsetattr(STDIN_FILENO, TCSANOW, &raw);
  WriteOut(kEnter);
  entered_ = true;
}

void Screen::Leave() {
  if (!entered_) return;
  WriteOut(kLeave);
  tcsetattr(STDIN_FILENO, TCSANOW, &before_);
  entered_ = false;
}

int Screen::columns() const { return Size().ws_col; }
int Screen::rows() const { return Size().ws_row; }

void Screen::Show(std::string_view text) {
  if (!entered_) return;
  std::string frame(kHome);
  const int most = rows();
  for (int row = 0; row < most; ++row) {
    const std::size_t end = text.find('\n');
    // Cleared first: after a line of full width the last column would be lost.
    frame += kClearLine;
    frame += text.substr(0, end);
    text.remove_prefix(end == std::string_view::npos ? text.size() : end + 1);
    // A line feed after the last row would scroll the screen.
    if (row + 1 < most) frame += "\r\n";
  }
  WriteOut(frame);
}

Key Screen::Take() {
  char block[64];
  const ssize_t count = read(STDIN_FILENO, block, sizeof block);
  if (count > 0) typed_.append(block, static_cast<std::size_t>(count));
  while (!typed_.empty()) {
    const auto starts = [this](std::string_view keys) {
      if (!std::string_view(typed_).starts_with(keys)) return false;
      typed_.erase(0, keys.size());
      return true;
    };
    if (starts("\033[A") || starts("\033OA") || starts("k")) return Key::kUp;
    if (starts("\033[B") || starts("\033OB") || starts("j")) return Key::kDown;
    if (starts("q") || starts("Q")) return Key::kQuit;
    typed_.erase(0, 1);
  }
  return Key::kNone;
}

}  // namespace lastscan::commands
