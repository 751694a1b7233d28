// A whole terminal as a screen that is redrawn in place, given back as it was
// whatever happens.
#pragma once

#include <termios.h>

#include <string>
#include <string_view>

namespace lastscan::commands {

enum class Key { kNone, kQuit, kUp, kDown };

// While it lives the terminal shows the alternate screen, without echo and
// cursor, and keys come one by one. REQUIRES: standard input and standard
// output are terminals; one Screen at a time.
class Screen {
 public:
  Screen();
  ~Screen();
  Screen(const Screen&) = delete;
  Screen& operator=(const Screen&) = delete;

  // Gives the terminal back (before the program is suspended), and takes it again.
  void Leave();
  void Enter();

  // Columns and rows now.
  int columns() const;
  int rows() const;

  // Shows the lines of `text`, cut to the screen's rows. Lines are no wider
  // than columns().
  void Show(std::string_view text);

  // The next key that was pressed. Never waits.
  Key Take();

 private:
  termios before_{};
  bool entered_ = false;
  std::string typed_;
};

}  // namespace lastscan::commands
