// Client and daemon find each other without settings: both keep the same rule.
#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cstdlib>
#include <map>
#include <optional>
#include <string>

#include "commands/connection.h"
#include "service/places.h"
#include "service/settings_file.h"

namespace lastscan::commands {
namespace {

constexpr const char* kVariables[] = {"RUNTIME_DIRECTORY", "STATE_DIRECTORY", "XDG_RUNTIME_DIR",
                                      "XDG_STATE_HOME", "HOME"};

class Endpoint : public ::testing::Test {
 protected:
  void SetUp() override {
    for (const char* name : kVariables) {
      const char* value = std::getenv(name);
      before_[name] = value == nullptr ? std::nullopt : std::optional<std::string>(value);
      unsetenv(name);
    }
  }
  void TearDown() override {
    for (const auto& [name, value] : before_) {
      if (value) {
        setenv(name, value->c_str(), 1);
      } else {
        unsetenv(name);
      }
    }
  }

 private:
  std::map<const char*, std::optional<std::string>> before_;
};

TEST_F(Endpoint, ClientAndDaemonAgree) {
  using Variables = std::map<std::string, std::string>;
  const std::vector<std::pair<Variables, std::string>> cases = {
      {{{"HOME", "/h"}}, "ipc:///h/.local/state/lastscan/request.sock"},
      {{{"HOME", "/h"}, {"XDG_STATE_HOME", "/s"}}, "ipc:///s/lastscan/request.sock"},
      {{{"HOME", "/h"}, {"XDG_RUNTIME_DIR", "/run/u"}}, "ipc:///run/u/lastscan/request.sock"},
      {{{"HOME", "/h"}, {"XDG_RUNTIME_DIR", "relative"}},
       "ipc:///h/.local/state/lastscan/request.sock"},
      {{{"HOME", "/h"}, {"XDG_RUNTIME_DIR", ""}}, "ipc:///h/.local/state/lastscan/request.sock"},
      {{{"STATE_DIRECTORY", "/var/a:/var/b"}}, "ipc:///var/a/request.sock"},
      {{{"STATE_DIRECTORY", "/var/a"}, {"RUNTIME_DIRECTORY", "/run/a:/run/b"}},
       "ipc:///run/a/request.sock"}};
  for (const auto& [variables, expected] : cases) {
    for (const char* name : kVariables) unsetenv(name);
    for (const auto& [name, value] : variables) setenv(name.c_str(), value.c_str(), 1);
    EXPECT_EQ(DefaultEndpoint(), expected);
    EXPECT_EQ(service::EmbeddedSettings().service().request_endpoint(), expected);
    EXPECT_EQ(StateFolder(), service::StateFolder().string());
  }
}

TEST_F(Endpoint, AgreeForAUserWithoutVariables) {
  EXPECT_EQ(DefaultEndpoint(), service::EmbeddedSettings().service().request_endpoint());
}

TEST_F(Endpoint, AWrongEndpointIsNamed) {
  for (const char* endpoint : {"nonsense", "http://x", "tcp://"}) {
    EXPECT_THAT([&] { Connection connection(endpoint); },
                ::testing::ThrowsMessage<Failure>(::testing::HasSubstr(endpoint)));
  }
}

TEST_F(Endpoint, NobodyThereIsSaid) {
  const std::string endpoint = "ipc:///nowhere/at/all.sock";
  Connection connection(endpoint);
  v1::Request request;
  request.mutable_ping();
  EXPECT_THAT([&] { connection.Ask(request); },
              ::testing::ThrowsMessage<NoAnswer>("no daemon answers at " + endpoint +
                                                 ": start lastscand or name another with --at"));
}

}  // namespace
}  // namespace lastscan::commands
