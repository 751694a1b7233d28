// The daemon's settings: embedded defaults, and a TOML file laid over them.
// config/lastscan.toml documents every key and holds exactly the defaults.
#pragma once

#include <stdexcept>
#include <string>
#include <string_view>

#include "lastscan/v1/settings.pb.h"

namespace lastscan::service {

// A settings file that cannot be read, has an unknown key, a wrong type or an
// impossible value. what() is one line: file, line, key, what is wrong, what to do.
class SettingsError : public std::runtime_error {
 public:
  // Control characters, which keys and values of a file may bring along, become
  // question marks: an error stays one line.
  explicit SettingsError(std::string line);
};

// The settings without any file, places (places.h) filled in.
// Throws NoPlace.
v1::Settings EmbeddedSettings();

// The settings that the file at `path` leaves, places filled in. Throws
// SettingsError, NoPlace.
v1::Settings ReadSettings(const std::string& path);

// The same for the text of a file, called `name` in errors.
v1::Settings ParseSettings(std::string_view text, const std::string& name);

}  // namespace lastscan::service
