// Where the daemon keeps things when nobody says otherwise. The client follows the
// same rule (client/commands/connection.h) to find the daemon without settings.
#pragma once

#include <filesystem>
#include <stdexcept>
#include <string>

namespace lastscan::service {

// None of the places can be told. what() says what to set.
class NoPlace : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

// The folder of the ledger: $STATE_DIRECTORY (its first entry; the service
// manager sets it), else $XDG_STATE_HOME/lastscan, else ~/.local/state/lastscan.
// Throws NoPlace.
std::filesystem::path StateFolder();

// The folder of the sockets: $RUNTIME_DIRECTORY (its first entry), else
// $XDG_RUNTIME_DIR/lastscan, else StateFolder(). Throws NoPlace.
std::filesystem::path RunFolder();

// `text` with every "{state}" and "{run}" replaced by these folders.
std::string WithPlaces(std::string text);

}  // namespace lastscan::service
