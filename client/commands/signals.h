// Signals as a file descriptor, so that a waiting loop ends or redraws at once
// and cleans up in ordinary code.
#pragma once

#include <initializer_list>
#include <optional>

namespace lastscan::commands {

// While it lives, the signals it was given are blocked and come out of Take.
// REQUIRES: made before the first socket, so that no other thread takes them.
class Signals {
 public:
  explicit Signals(std::initializer_list<int> signals);
  ~Signals();
  Signals(const Signals&) = delete;
  Signals& operator=(const Signals&) = delete;

  // Readable when a signal is waiting.
  int descriptor() const { return descriptor_; }
  // The next waiting signal. Never waits.
  std::optional<int> Take();

 private:
  int descriptor_;
};

}  // namespace lastscan::commands
