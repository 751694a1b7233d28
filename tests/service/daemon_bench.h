// A bench for tests of the real `lastscand`: a folder of its own with settings,
// sockets and ledger, the daemon as a process, and a sender on the real socket.
#pragma once

#include <gtest/gtest.h>
#include <sys/types.h>

#include <filesystem>
#include <optional>
#include <string>
#include <string_view>
#include <vector>
#include <zmq.hpp>

#include "formats/recording.h"
#include "lastscan/v1/service.pb.h"
#include "rehearsal/invented_run.h"

namespace lastscan::daemon_tests {

struct Ended {
  int code = -1;  // exit code; 128 + signal if it was killed
  std::string out;
  std::string err;
};

class DaemonBench : public ::testing::Test {
 protected:
  void SetUp() override;
  void TearDown() override;

  // Starts the daemon with the bench's settings and waits until it answers.
  void StartDaemon();
  // Sends it `signal` and waits for its end.
  Ended StopDaemon(int signal);
  // The daemon with these arguments, to its end.
  Ended RunDaemon(const std::vector<std::string>& arguments);

  // Writes the settings: sockets and ledger in the bench's folder, then `more`.
  void WriteSettings(const std::string& service_keys = "", const std::string& more = "");
  std::string Write(const std::string& name, const std::string& text) const;

  // Sends these frames as they are and returns the reply; nothing if none comes.
  std::optional<v1::Reply> SendFrames(const std::vector<std::string_view>& frames,
                                      int milliseconds = 10000);
  v1::Reply Send(const formats::Recording& recording);
  v1::Reply Ask(const v1::Request& request);
  v1::Reply Show(const std::string& run);

  std::string RequestEndpoint() const { return "ipc://" + Path("run/request.sock"); }
  std::string BroadcastEndpoint() const { return "ipc://" + Path("run/broadcast.sock"); }
  std::string Path(const std::string& name) const { return (folder_ / name).string(); }

  // The first `looks` snapshots of a small invented run, 8 scans apart, whose
  // times of recording are `seconds` apart.
  static std::vector<formats::Recording> Night(const std::string& run, int looks,
                                               double seconds = 20);

  std::filesystem::path folder_;
  zmq::context_t context_{1};

 private:
  pid_t Spawn(const std::vector<std::string>& arguments, int number) const;
  Ended WaitFor(pid_t process, int number) const;

  pid_t daemon_ = -1;
  int daemon_number_ = 0;
  int started_ = 0;
};

}  // namespace lastscan::daemon_tests
