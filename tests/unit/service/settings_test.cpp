// Settings: the shown file is the embedded default, and every mistake is named
// with file, line and key.
#include <google/protobuf/util/message_differencer.h>
#include <gtest/gtest.h>

#include <cstdlib>
#include <filesystem>
#include <fstream>
#include <iterator>
#include <string>
#include <vector>

#include "service/places.h"
#include "service/settings_file.h"

namespace lastscan::service {
namespace {

using google::protobuf::util::MessageDifferencer;

// The places of a person without a service manager.
class SettingsTest : public ::testing::Test {
 protected:
  void SetUp() override {
    for (const char* name : {"STATE_DIRECTORY", "RUNTIME_DIRECTORY", "XDG_STATE_HOME"}) {
      ::unsetenv(name);
    }
    ::setenv("HOME", "/home/operator", 1);
    ::setenv("XDG_RUNTIME_DIR", "/run/user/1000", 1);
  }

  static std::string ErrorOf(const std::string& text) {
    try {
      ParseSettings(text, "lab.toml");
    } catch (const SettingsError& error) {
      return error.what();
    }
    return "no error";
  }
};

std::string ShownFile() { return LASTSCAN_SOURCE_DIR "/config/lastscan.toml"; }

TEST_F(SettingsTest, TheShownFileIsExactlyTheEmbeddedDefault) {
  MessageDifferencer differencer;
  std::string difference;
  differencer.ReportDifferencesToString(&difference);
  EXPECT_TRUE(differencer.Compare(ReadSettings(ShownFile()), EmbeddedSettings())) << difference;
}

TEST_F(SettingsTest, TheShownFileHoldsEveryKey) {
  // Each key of the shown file is replaced by a misspelt one in turn: the error
  // lists the keys known there, and all of these must be shown in the file.
  std::ifstream file(ShownFile());
  const std::string text(std::istreambuf_iterator<char>(file), {});
  for (const char* table : {"[service]\n", "[log]\n", "[engine]\n", "[nucleus.13C]\n",
                            "[[event]]\nwhat=\"fill\"\nbegins_at=2027-01-31T07:30:00Z\n", ""}) {
    const std::string error = ErrorOf(std::string(table) + "misspelt = 1\n");
    const std::string list = "known here: ";
    ASSERT_NE(error.find(list), std::string::npos) << error;
    std::string keys = error.substr(error.find(list) + list.size()) + ", ";
    for (std::size_t comma; (comma = keys.find(", ")) != std::string::npos;) {
      const std::string key = keys.substr(0, comma);
      keys.erase(0, comma + 2);
      const bool shown = text.find("\n" + key + " = ") != std::string::npos ||
                         text.find("# " + key + " = ") != std::string::npos ||
                         text.find("#   " + key + " = ") != std::string::npos ||
                         text.find("[" + key) != std::string::npos;
      EXPECT_TRUE(shown) << key << " of " << table;
    }
  }
}

TEST_F(SettingsTest, PlacesFollowTheEnvironment) {
  EXPECT_EQ(EmbeddedSettings().ledger_path(), "/home/operator/.local/state/lastscan/ledger.sqlite");
  EXPECT_EQ(EmbeddedSettings().service().request_endpoint(),
            "ipc:///run/user/1000/lastscan/request.sock");
  ::setenv("XDG_STATE_HOME", "relative/is/ignored", 1);
  EXPECT_EQ(StateFolder(), "/home/operator/.local/state/lastscan");
  ::setenv("XDG_STATE_HOME", "/state", 1);
  EXPECT_EQ(StateFolder(), "/state/lastscan");
  ::unsetenv("XDG_RUNTIME_DIR");
  EXPECT_EQ(RunFolder(), "/state/lastscan");
  ::setenv("STATE_DIRECTORY", "/var/lib/lastscan:/var/lib/other", 1);
  ::setenv("RUNTIME_DIRECTORY", "/run/lastscan", 1);
  EXPECT_EQ(EmbeddedSettings().ledger_path(), "/var/lib/lastscan/ledger.sqlite");
  EXPECT_EQ(EmbeddedSettings().service().broadcast_endpoint(),
            "ipc:///run/lastscan/broadcast.sock");
}

TEST_F(SettingsTest, AnEmptyFileIsTheDefault) {
  EXPECT_TRUE(MessageDifferencer::Equals(ParseSettings("", "x"), EmbeddedSettings()));
}

TEST_F(SettingsTest, ReadsWhatIsThereAndKeepsTheRest) {
  const v1::Settings settings = ParseSettings(R"(
ledger_path = "/srv/lastscan/ledger.sqlite"
[service]
silent_after_intervals = 4
[log]
level = "debug"
target = "{state}/lastscand.log"
[nucleus."*"]
target = 20
phase_cycle = 8
[nucleus.29Si]
convention = "peak-to-peak"
windows = [[-120, -80.5], [-20, 10]]
noise_window = [50, 80]
[nucleus.13C]
excluded = [[76.5, 77.8]]
[[event]]
what = "liquid nitrogen fill"
begins_at = 2027-01-31T07:30:00+01:00
[[event]]
instrument = "bench-2"
what = "power cut"
begins_at = 2027-02-01T00:00:00Z
)",
                                              "x");
  EXPECT_EQ(settings.ledger_path(), "/srv/lastscan/ledger.sqlite");
  EXPECT_DOUBLE_EQ(settings.service().silent_after_intervals(), 4);
  EXPECT_EQ(settings.service().most_points(), EmbeddedSettings().service().most_points());
  EXPECT_EQ(settings.log().target(), "/home/operator/.local/state/lastscan/lastscand.log");
  ASSERT_EQ(settings.engine().nuclei_size(), EmbeddedSettings().engine().nuclei_size() + 1);
  const v1::NucleusDefaults& silicon =
      settings.engine().nuclei(settings.engine().nuclei_size() - 1);
  EXPECT_EQ(silicon.nucleus(), "29Si");
  EXPECT_DOUBLE_EQ(silicon.goal().target(), 20);  // begins as "*"
  EXPECT_EQ(silicon.phase_cycle(), 8U);
  EXPECT_EQ(silicon.goal().kind(), v1::WEAKEST_WINDOW);  // what windows mean
  EXPECT_EQ(silicon.goal().convention(), v1::PEAK_TO_PEAK);
  ASSERT_EQ(silicon.goal().windows_size(), 2);
  EXPECT_DOUBLE_EQ(silicon.goal().windows(0).high_ppm(), -80.5);
  EXPECT_DOUBLE_EQ(silicon.noise_window().low_ppm(), 50);
  ASSERT_EQ(settings.engine().events_size(), 2);
  // 2027-01-31T06:30:00Z by `date -u -d 2027-01-31T07:30:00+01:00 +%s`.
  EXPECT_EQ(settings.engine().events(0).begins_at().seconds(), 1801377000);
  EXPECT_EQ(settings.engine().events(1).instrument(), "bench-2");
}

TEST_F(SettingsTest, EveryMistakeNamesFileLineAndKey) {
  const std::vector<std::pair<std::string, std::string>> mistakes = {
      {"[service]\n\nmost_pointz = 3", "lab.toml:3: service.most_pointz: unknown key"},
      {"colour = 'blue'", "lab.toml:1: colour: unknown key"},
      {"[colours]\nred = 1", "lab.toml:1: colours: unknown key"},
      {"ledger_path = 3", "lab.toml:1: ledger_path: is a whole number: write text"},
      {"ledger_path = 'ledger.sqlite'", "lab.toml:1: ledger_path: is \"ledger.sqlite\": write the"},
      {"service = 1", "lab.toml:1: service: is a whole number: write a table"},
      {"[service]\nmost_points = '9'", "lab.toml:2: service.most_points: is text: write a whole"},
      {"[service]\nmost_points = 9.5", "lab.toml:2: service.most_points: is a number: write a"},
      {"[service]\nmost_points = -1", "lab.toml:2: service.most_points: is -1: allowed is from 16"},
      {"[service]\nsilent_after_intervals = nan", "is not a finite number"},
      {"[service]\nsilent_after_intervals = inf", "is not a finite number"},
      {"[service]\nsilent_after_intervals = true", "is true or false: write a number"},
      {"[service]\nrequest_endpoint = 'tcp://0.0.0.0:7000'",
       "lab.toml:2: service.request_endpoint: \"tcp://0.0.0.0:7000\" is not on this computer"},
      {"[service]\nrequest_endpoint = 'tcp://127.0.0.1:0'", "has no port from 1 to 65535"},
      {"[service]\nrequest_endpoint = 'ipc://relative.sock'", "has no absolute path"},
      {"[service]\nrequest_endpoint = 'ipc:///" + std::string(200, 'x') + "'", "201 bytes"},
      {"[service]\nrequest_endpoint = 'ipc:///a'\nbroadcast_endpoint = 'ipc:///a'",
       "lab.toml:3: service.broadcast_endpoint: is the request_endpoint too"},
      {"[log]\nlevel = 'loud'", "lab.toml:2: log.level: is \"loud\": write \"trace\""},
      {"[log]\ntarget = 'somewhere'", "lab.toml:2: log.target: is \"somewhere\""},
      {"[log]\ntarget = \"/tmp/a\\nb\"", "lab.toml:2: log.target: has a control character"},
      {"[engine]\nfalse_confirmation = 0", "lab.toml:2: engine.false_confirmation: is 0: allowed"},
      {"[nucleus.13C]\ntarget = 0", "lab.toml:2: nucleus.13C.target: is 0: allowed"},
      {"[nucleus.13C]\ntarget = -3", "lab.toml:2: nucleus.13C.target: is -3: allowed"},
      {"[nucleus.'*']\ntarget = nan", "lab.toml:2: nucleus.\"*\".target: is not a finite number"},
      {"[nucleus.13C]\nassurance = 1", "lab.toml:2: nucleus.13C.assurance: is 1: allowed"},
      {"[nucleus.13C]\nkind = 'line-count'\nlines = 0", "lab.toml:3: nucleus.13C.lines: is 0"},
      {"[nucleus.13C]\nkind = 'known-line'", "nucleus.13C.windows: is missing"},
      {"[nucleus.13C]\nwindows = [[10, 5]]", "lab.toml:2: nucleus.13C.windows: has its low end"},
      {"[nucleus.13C]\nwindows = [5, 10]", "lab.toml:2: nucleus.13C.windows: is no range"},
      {"[nucleus.13C]\nnoise_window = [1, inf]", "is not a finite number"},
      {"[nucleus.carbon]\ntarget = 3", "lab.toml:1: nucleus.carbon: is no nucleus"},
      {"nucleus = ['13C']", "lab.toml:1: nucleus: is a list: write a table"},
      {"[event]\nwhat = 'fill'", "lab.toml:1: event: is a table: write a table [[event]]"},
      {"[[event]]\nbegins_at = 2027-01-31T07:30:00Z", "lab.toml:1: event.what: is missing"},
      {"[[event]]\nwhat = 'fill'", "lab.toml:1: event.begins_at: is missing"},
      {"[[event]]\nwhat = 'fill'\nbegins_at = 2027-01-31T07:30:00",
       "lab.toml:3: event.begins_at: is no point in time"},
      {"[[event]]\nwhat = 'fill'\nbegins_at = '2027-01-31'",
       "event.begins_at: is no point in time"},
      {"a = 1\na = 2", "lab.toml:2: not TOML"},
      {"[service\n", "lab.toml:1: not TOML"},
      {"a = i\n", "lab.toml:1: not TOML"},  // the parser quotes the line feed
      {"\"a\\nb\" = 1", "lab.toml:1: \"a?b\": unknown key"},
      {std::string("a = \"\0\"", 7), "lab.toml:1: not TOML"},
  };
  for (const auto& [text, expected] : mistakes) {
    const std::string error = ErrorOf(text);
    EXPECT_NE(error.find(expected), std::string::npos) << text << "\n-> " << error;
    EXPECT_EQ(error.find('\n'), std::string::npos) << error;
    EXPECT_EQ(error.rfind("lab.toml", 0), 0U) << error;
  }
}

TEST_F(SettingsTest, FilesThatCannotBeReadAreNamed) {
  const auto error_of = [](const std::string& path) -> std::string {
    try {
      ReadSettings(path);
    } catch (const SettingsError& error) {
      return error.what();
    }
    return "no error";
  };
  const std::string missing = ::testing::TempDir() + "/not-there.toml";
  EXPECT_EQ(error_of(missing).rfind(missing + ": there is no such file", 0), 0U);
  EXPECT_NE(error_of(::testing::TempDir()).find("is a folder"), std::string::npos);
  const std::string large = ::testing::TempDir() + "/large.toml";
  std::ofstream(large) << std::string(2 << 20, '#');
  EXPECT_NE(error_of(large).find("larger than 1 MiB"), std::string::npos);
  std::filesystem::remove(large);
}

}  // namespace
}  // namespace lastscan::service
