// The engine's one kind of error: input that cannot be true or cannot be judged.
#pragma once

#include <stdexcept>
#include <string>

namespace lastscan::engine {

// Thrown when a snapshot or a goal is refused. what() is one line for a person:
// what is wrong, where, and what to do about it. Nothing has changed.
class Refusal : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

}  // namespace lastscan::engine
