// Fuzzes the settings file: any text is either settings, which the engine then
// takes, or one line that begins with the file's name.
#include <cstddef>
#include <cstdint>
#include <cstdlib>
#include <string>
#include <string_view>

#include "engine/run.h"
#include "service/settings_file.h"

extern "C" int LLVMFuzzerInitialize(int*, char***) {
  ::setenv("STATE_DIRECTORY", "/state", 1);
  ::setenv("RUNTIME_DIRECTORY", "/run/lastscan", 1);
  return 0;
}

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  const std::string_view text(reinterpret_cast<const char*>(data), size);
  try {
    const lastscan::v1::Settings settings = lastscan::service::ParseSettings(text, "lab.toml");
    lastscan::engine::Run run(settings.engine());
    if (settings.ledger_path().empty()) std::abort();
  } catch (const lastscan::service::SettingsError& error) {
    const std::string_view line(error.what());
    if (line.substr(0, 8) != "lab.toml" || line.find('\n') != std::string_view::npos) std::abort();
  }
  return 0;
}
