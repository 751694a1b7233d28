// The daemon's settings: embedded defaults, and a TOML file laid over them.
#include "service/settings_file.h"

#include <algorithm>
#include <array>
#include <filesystem>
#include <fstream>
#include <iterator>

#include "engine/refusal.h"
#include "engine/run.h"
#include "service/endpoint.h"
#include "service/places.h"
#include "service/settings_table.h"

namespace lastscan::service {
namespace {

constexpr std::uintmax_t kLargestFile = 1 << 20;

// The words of the enums, in the order of their numbers from 1.
const std::vector<std::string_view> kGoalKinds = {"weakest-window", "line-count", "known-line"};
const std::vector<std::string_view> kConventions = {"height-over-rms", "height-over-twice-rms",
                                                    "peak-to-peak"};
const std::vector<std::string_view> kLevels = {"trace", "debug", "info", "warn", "error"};

v1::Settings Unplaced() {
  v1::Settings settings;
  *settings.mutable_engine() = engine::DefaultSettings();
  v1::ServiceSettings& service = *settings.mutable_service();
  service.set_request_endpoint("ipc://{run}/request.sock");
  service.set_broadcast_endpoint("ipc://{run}/broadcast.sock");
  service.set_largest_message_bytes(64u << 20);
  service.set_most_points(1u << 20);
  service.set_most_active_runs(256);
  service.set_silent_after_intervals(3);
  v1::LogSettings& log = *settings.mutable_log();
  log.set_level("info");
  log.set_target("journal");
  log.set_rotate_bytes(10u << 20);
  log.set_rotate_files(5);
  settings.set_ledger_path("{state}/ledger.sqlite");
  return settings;
}

v1::Settings Placed(v1::Settings settings) {
  settings.set_ledger_path(WithPlaces(settings.ledger_path()));
  v1::ServiceSettings& service = *settings.mutable_service();
  service.set_request_endpoint(WithPlaces(service.request_endpoint()));
  service.set_broadcast_endpoint(WithPlaces(service.broadcast_endpoint()));
  settings.mutable_log()->set_target(WithPlaces(settings.log().target()));
  return settings;
}

void ReadGoal(SettingsTable& table, v1::Goal* goal) {
  // Windows without a kind can only mean one; the others need to be named.
  if (table.Has("windows") && !table.Has("kind")) goal->set_kind(v1::WEAKEST_WINDOW);
  int kind = goal->kind() - 1;
  table.Read("kind", kGoalKinds, &kind);
  goal->set_kind(static_cast<v1::GoalKind>(kind + 1));
  double target = goal->target();
  table.Read("target", &target, {0.1, 1e6});
  goal->set_target(target);
  int convention = goal->convention() - 1;
  table.Read("convention", kConventions, &convention);
  goal->set_convention(static_cast<v1::Convention>(convention + 1));
  double assurance = goal->assurance();
  table.Read("assurance", &assurance, {0.5, 0.9999});
  goal->set_assurance(assurance);
  double tolerance = goal->tolerance();
  table.Read("tolerance", &tolerance, {0.001, 0.5});
  goal->set_tolerance(tolerance);
  table.Read("windows", goal->mutable_windows());
  table.Read("excluded", goal->mutable_excluded());
  table.Read("solvent", goal->mutable_solvent());
  std::uint64_t lines = goal->lines();
  table.Read("lines", &lines, {1, 1000});
  goal->set_lines(static_cast<std::uint32_t>(lines));
  double broadening = goal->broadening_hz();
  table.Read("broadening_hz", &broadening, {0.01, 10000});
  goal->set_broadening_hz(broadening);
  if (goal->kind() == v1::KNOWN_LINE && goal->windows_size() == 0) {
    table.Fail("windows", "is missing: the goal \"known-line\" needs a range to look in");
  }
}

void ReadNucleus(SettingsTable& table, v1::NucleusDefaults* nucleus) {
  ReadGoal(table, nucleus->mutable_goal());
  v1::ShiftRange noise_window = nucleus->noise_window();
  table.Read("noise_window", &noise_window);
  if (noise_window.low_ppm() < noise_window.high_ppm()) {
    *nucleus->mutable_noise_window() = noise_window;
  }
  std::uint64_t phase_cycle = nucleus->phase_cycle();
  table.Read("phase_cycle", &phase_cycle, {1, 4096});
  nucleus->set_phase_cycle(static_cast<std::uint32_t>(phase_cycle));
  table.Close();
}

// "13C": a mass number and an element's symbol.
bool IsNucleus(const std::string& name) {
  if (name == "*") return true;
  const auto letter = std::find_if_not(name.begin(), name.end(),
                                       [](unsigned char c) { return std::isdigit(c) != 0; });
  const auto digits = letter - name.begin();
  const auto letters = name.end() - letter;
  return digits >= 1 && digits <= 3 && letters >= 1 && letters <= 2 &&
         std::isupper(static_cast<unsigned char>(*letter)) != 0 &&
         std::all_of(letter + 1, name.end(), [](unsigned char c) { return std::islower(c) != 0; });
}

v1::NucleusDefaults* FindNucleus(const std::string& name, v1::EngineSettings* engine) {
  for (v1::NucleusDefaults& nucleus : *engine->mutable_nuclei()) {
    if (nucleus.nucleus() == name) return &nucleus;
  }
  // A nucleus of its own begins as what served it until now.
  v1::NucleusDefaults begin;
  if (name != "*") {
    if (const v1::NucleusDefaults* others = FindNucleus("*", engine)) begin = *others;
  }
  begin.set_nucleus(name);
  *engine->add_nuclei() = begin;
  return engine->mutable_nuclei(engine->nuclei_size() - 1);
}

void ReadNuclei(SettingsTable& top, v1::EngineSettings* engine) {
  // Two passes: "*" first, whatever its place in the file, for others begin as it.
  for (const bool others : {false, true}) {
    top.ReadNamed("nucleus", [&](const std::string& name, SettingsTable& table) {
      if (!IsNucleus(name)) {
        table.Fail("", "is no nucleus: write a mass number and a symbol, as in 13C, or \"*\"");
      }
      if ((name != "*") == others) ReadNucleus(table, FindNucleus(name, engine));
    });
  }
}

void ReadEngine(SettingsTable& table, v1::EngineSettings* engine) {
  double false_confirmation = engine->false_confirmation();
  table.Read("false_confirmation", &false_confirmation, {1e-6, 0.2});
  engine->set_false_confirmation(false_confirmation);
  double out_of_reach = engine->out_of_reach_chance();
  table.Read("out_of_reach_chance", &out_of_reach, {1e-6, 0.49});
  engine->set_out_of_reach_chance(out_of_reach);
  double extension = engine->longest_extension();
  table.Read("longest_extension", &extension, {1, 1000});
  engine->set_longest_extension(extension);
  table.Close();
}

void ReadEvent(SettingsTable& table, v1::EngineSettings* engine) {
  v1::SiteEvent event;
  table.Read("instrument", event.mutable_instrument());
  table.Read("what", event.mutable_what());
  table.Read("begins_at", event.mutable_begins_at());
  if (event.what().empty()) table.Fail("what", "is missing: write what happens");
  if (event.begins_at().seconds() == 0) {
    table.Fail("begins_at", "is missing: write when it begins, as in 2027-01-31T07:30:00+01:00");
  }
  table.Close();
  *engine->add_events() = event;
}

void ReadEndpoint(SettingsTable& table, std::string_view key, std::string* endpoint) {
  table.Read(key, endpoint);
  if (const auto complaint = ComplaintAboutEndpoint(WithPlaces(*endpoint))) {
    table.Fail(key, "\"" + *endpoint + "\" " + *complaint);
  }
}

void ReadService(SettingsTable& table, v1::ServiceSettings* service) {
  ReadEndpoint(table, "request_endpoint", service->mutable_request_endpoint());
  ReadEndpoint(table, "broadcast_endpoint", service->mutable_broadcast_endpoint());
  if (service->request_endpoint() == service->broadcast_endpoint()) {
    table.Fail("broadcast_endpoint", "is the request_endpoint too: write another one");
  }
  std::uint64_t bytes = service->largest_message_bytes();
  table.Read("largest_message_bytes", &bytes, {1 << 16, 1 << 30});
  service->set_largest_message_bytes(bytes);
  std::uint64_t points = service->most_points();
  table.Read("most_points", &points, {16, 1 << 26});
  service->set_most_points(static_cast<std::uint32_t>(points));
  std::uint64_t runs = service->most_active_runs();
  table.Read("most_active_runs", &runs, {1, 100000});
  service->set_most_active_runs(static_cast<std::uint32_t>(runs));
  double intervals = service->silent_after_intervals();
  table.Read("silent_after_intervals", &intervals, {1.5, 1000});
  service->set_silent_after_intervals(intervals);
  table.Close();
}

void ReadLog(SettingsTable& table, v1::LogSettings* log) {
  int level =
      static_cast<int>(std::find(kLevels.begin(), kLevels.end(), log->level()) - kLevels.begin());
  table.Read("level", kLevels, &level);
  log->set_level(std::string(kLevels[static_cast<std::size_t>(level)]));
  table.Read("target", log->mutable_target());
  const std::string& target = log->target();
  if (target != "journal" && target != "stderr" && WithPlaces(target).substr(0, 1) != "/") {
    table.Fail("target",
               "is \"" + target + "\": write \"journal\", \"stderr\" or the full path of a file");
  }
  std::uint64_t bytes = log->rotate_bytes();
  table.Read("rotate_bytes", &bytes, {4096, 1e12});
  log->set_rotate_bytes(bytes);
  std::uint64_t files = log->rotate_files();
  table.Read("rotate_files", &files, {1, 1000});
  log->set_rotate_files(static_cast<std::uint32_t>(files));
  table.Close();
}

std::string TextOf(const std::string& path) {
  std::error_code error;
  const auto status = std::filesystem::status(path, error);
  if (!std::filesystem::exists(status)) {
    throw SettingsError(path + ": there is no such file; name another with --settings");
  }
  if (std::filesystem::is_directory(status)) {
    throw SettingsError(path + ": is a folder; name a file with --settings");
  }
  std::ifstream file(path, std::ios::binary);
  if (!file) throw SettingsError(path + ": cannot be read; mend its rights or name another file");
  std::string text;
  std::array<char, 4096> part{};
  while (file.read(part.data(), part.size()) || file.gcount() > 0) {
    text.append(part.data(), static_cast<std::size_t>(file.gcount()));
    if (text.size() > kLargestFile) {
      throw SettingsError(path + ": is larger than 1 MiB; this is hardly a settings file");
    }
  }
  return text;
}

std::string Printable(std::string line) {
  std::replace_if(
      line.begin(), line.end(), [](unsigned char c) { return c < ' ' || c == 0x7f; }, '?');
  return line;
}

}  // namespace

SettingsError::SettingsError(std::string line) : std::runtime_error(Printable(line)) {}

v1::Settings EmbeddedSettings() { return Placed(Unplaced()); }

v1::Settings ReadSettings(const std::string& path) { return ParseSettings(TextOf(path), path); }

v1::Settings ParseSettings(std::string_view text, const std::string& name) {
  v1::Settings settings = Unplaced();
  try {
    const toml::table file = toml::parse(text);
    SettingsTable top(file, name, "");
    std::string ledger_path = settings.ledger_path();
    top.Read("ledger_path", &ledger_path);
    if (WithPlaces(ledger_path).substr(0, 1) != "/") {
      top.Fail("ledger_path", "is \"" + ledger_path + "\": write the full path of a file");
    }
    settings.set_ledger_path(ledger_path);
    top.ReadTable("service", [&](auto& table) { ReadService(table, settings.mutable_service()); });
    top.ReadTable("log", [&](auto& table) { ReadLog(table, settings.mutable_log()); });
    top.ReadTable("engine", [&](auto& table) { ReadEngine(table, settings.mutable_engine()); });
    ReadNuclei(top, settings.mutable_engine());
    top.ReadEach("event", [&](auto& table) { ReadEvent(table, settings.mutable_engine()); });
    top.Close();
  } catch (const toml::parse_error& error) {
    throw SettingsError(name + ":" + std::to_string(error.source().begin.line) +
                        ": not TOML: " + std::string(error.description()));
  }
  try {
    engine::Run check(settings.engine());
  } catch (const engine::Refusal& refusal) {
    throw SettingsError(name + ": " + refusal.what());
  }
  return Placed(settings);
}

}  // namespace lastscan::service
