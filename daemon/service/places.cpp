// Where the daemon keeps things when nobody says otherwise.
#include "service/places.h"

#include <pwd.h>
#include <unistd.h>

#include <cstdlib>
#include <optional>

namespace lastscan::service {
namespace {

// The first folder that the environment variable lists, if it is an absolute
// path; the base directory specification has relative ones ignored.
std::optional<std::filesystem::path> FolderFrom(const char* variable) {
  const char* value = std::getenv(variable);
  if (value == nullptr) return std::nullopt;
  std::string first(value);
  first = first.substr(0, first.find(':'));
  std::filesystem::path path(first);
  if (!path.is_absolute()) return std::nullopt;
  return path;
}

void ReplaceAll(std::string& text, const std::string& what, const std::string& by) {
  for (std::size_t at = text.find(what); at != std::string::npos;
       at = text.find(what, at + by.size())) {
    text.replace(at, what.size(), by);
  }
}

}  // namespace

std::filesystem::path StateFolder() {
  if (auto folder = FolderFrom("STATE_DIRECTORY")) return *folder;
  if (auto folder = FolderFrom("XDG_STATE_HOME")) return *folder / "lastscan";
  if (auto home = FolderFrom("HOME")) return *home / ".local/state/lastscan";
  const passwd* user = ::getpwuid(::getuid());
  if (user != nullptr && user->pw_dir != nullptr && user->pw_dir[0] == '/') {
    return std::filesystem::path(user->pw_dir) / ".local/state/lastscan";
  }
  throw NoPlace(
      "no folder for the ledger: neither STATE_DIRECTORY, XDG_STATE_HOME nor HOME is set; set "
      "one, or name ledger_path in the settings");
}

std::filesystem::path RunFolder() {
  if (auto folder = FolderFrom("RUNTIME_DIRECTORY")) return *folder;
  if (auto folder = FolderFrom("XDG_RUNTIME_DIR")) return *folder / "lastscan";
  return StateFolder();
}

std::string WithPlaces(std::string text) {
  // Asked for only when needed: full paths must work where no place is known.
  if (text.find("{state}") != std::string::npos) {
    ReplaceAll(text, "{state}", StateFolder().string());
  }
  if (text.find("{run}") != std::string::npos) ReplaceAll(text, "{run}", RunFolder().string());
  return text;
}

}  // namespace lastscan::service
