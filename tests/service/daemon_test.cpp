// The real daemon, by its socket and its signals: snapshots, restarts, kills,
// garbage, silence, and everything that must keep it from starting.
#include <SQLiteCpp/Database.h>
#include <google/protobuf/util/message_differencer.h>
#include <signal.h>
#include <sys/socket.h>
#include <sys/stat.h>
#include <sys/un.h>
#include <unistd.h>

#include <chrono>
#include <cmath>
#include <fstream>
#include <random>
#include <thread>

#include "daemon_bench.h"
#include "engine/advice/cautions.h"
#include "engine/run.h"

namespace lastscan::daemon_tests {
namespace {

using google::protobuf::util::MessageDifferencer;

class DaemonTest : public DaemonBench {
 protected:
  static std::vector<v1::Advice> Uninterrupted(const std::vector<formats::Recording>& night) {
    engine::Run run(engine::DefaultSettings());
    std::vector<v1::Advice> advices;
    for (const formats::Recording& recording : night) {
      advices.push_back(run.Admit(recording.snapshot, formats::AsFrame(recording.samples)));
    }
    return advices;
  }

  // True if `err` is one line that begins with the program's name and mentions `what`.
  static ::testing::AssertionResult IsOneLine(const std::string& err, const std::string& what) {
    // Whatever was logged before the error is another matter.
    const std::size_t begins = err.find("lastscand: ");
    const std::string line = begins == std::string::npos ? "" : err.substr(begins);
    if (!line.empty() && line.find('\n') == line.size() - 1 &&
        line.find(what) != std::string::npos) {
      return ::testing::AssertionSuccess();
    }
    return ::testing::AssertionFailure() << "wanted one line with '" << what << "', got: " << err;
  }

  Ended RunWithSettings() { return RunDaemon({"--settings", Path("settings.toml")}); }
};

TEST_F(DaemonTest, AdvisesRepeatsAndStops) {
  StartDaemon();
  const auto night = Night("a", 6);
  const auto expected = Uninterrupted(night);
  for (std::size_t i = 0; i < night.size(); ++i) {
    const v1::Reply reply = Send(night[i]);
    EXPECT_EQ(reply.outcome(), v1::ACCEPTED) << reply.reason();
    EXPECT_TRUE(MessageDifferencer::Equals(reply.advice(), expected[i])) << i;
    EXPECT_EQ(reply.advice().cautions_size(), static_cast<int>(engine::Cautions().size()));
  }
  const v1::Reply repeated = Send(night[2]);
  EXPECT_EQ(repeated.outcome(), v1::REPEATED);
  EXPECT_TRUE(MessageDifferencer::Equals(repeated.advice(), expected[2]));

  const Ended ended = StopDaemon(SIGTERM);
  EXPECT_EQ(ended.code, 0);
  // The log: the cautions in full at the start, in short on each line of advice;
  // no sample's name.
  for (std::string_view caution : engine::Cautions()) {
    EXPECT_NE(ended.err.find(caution), std::string::npos);
  }
  std::size_t lines = 0;
  for (std::size_t at = 0; (at = ended.err.find(engine::CautionInShort(), at)) != std::string::npos;
       ++at) {
    ++lines;
  }
  EXPECT_EQ(lines, night.size());
  EXPECT_EQ(ended.err.find(night[0].snapshot.sample()), std::string::npos);
  EXPECT_FALSE(std::filesystem::exists(Path("run/request.sock")));
}

TEST_F(DaemonTest, InterruptStopsItToo) {
  StartDaemon();
  EXPECT_EQ(StopDaemon(SIGINT).code, 0);
}

TEST_F(DaemonTest, SocketsAreForOwnerAndGroupAlone) {
  StartDaemon();
  for (const char* name : {"run/request.sock", "run/broadcast.sock"}) {
    struct stat status {};
    ASSERT_EQ(::stat(Path(name).c_str(), &status), 0);
    EXPECT_EQ(status.st_mode & 0777, 0660U) << name;
  }
  struct stat status {};
  ASSERT_EQ(::stat(Path("run").c_str(), &status), 0);
  EXPECT_EQ(status.st_mode & 0777, 0700U);
}

TEST_F(DaemonTest, BroadcastsWhatItAcknowledges) {
  StartDaemon();
  zmq::socket_t subscriber(context_, zmq::socket_type::sub);
  subscriber.set(zmq::sockopt::linger, 0);
  subscriber.set(zmq::sockopt::rcvtimeo, 10000);
  const auto night = Night("a", 1);
  const std::string topic = night[0].snapshot.instrument() + "/a";
  subscriber.set(zmq::sockopt::subscribe, topic);
  subscriber.connect(BroadcastEndpoint());
  // Let the subscription arrive; broadcasts before it are lost by design.
  std::this_thread::sleep_for(std::chrono::milliseconds(300));
  const v1::Reply reply = Send(night[0]);
  zmq::message_t first, second;
  ASSERT_TRUE(subscriber.recv(first));
  ASSERT_TRUE(subscriber.recv(second));
  EXPECT_EQ(first.to_string(), topic);
  v1::Advice advice;
  ASSERT_TRUE(advice.ParseFromArray(second.data(), static_cast<int>(second.size())));
  EXPECT_TRUE(MessageDifferencer::Equals(advice, reply.advice()));
}

TEST_F(DaemonTest, ServesSendersThatUseTheOtherEnvelope) {
  StartDaemon();
  zmq::socket_t socket(context_, zmq::socket_type::req);
  socket.set(zmq::sockopt::linger, 0);
  socket.set(zmq::sockopt::rcvtimeo, 10000);
  socket.connect(RequestEndpoint());
  const auto night = Night("a", 1);
  v1::Request request;
  *request.mutable_snapshot() = night[0].snapshot;
  socket.send(zmq::buffer(request.SerializeAsString()), zmq::send_flags::sndmore);
  socket.send(zmq::buffer(formats::AsFrame(night[0].samples)), zmq::send_flags::none);
  zmq::message_t message;
  ASSERT_TRUE(socket.recv(message));
  v1::Reply reply;
  ASSERT_TRUE(reply.ParseFromArray(message.data(), static_cast<int>(message.size())));
  EXPECT_EQ(reply.outcome(), v1::ACCEPTED) << reply.reason();
}

TEST_F(DaemonTest, RefusesWhatCannotBeTrue) {
  StartDaemon();
  const auto night = Night("a", 3);
  Send(night[1]);
  const v1::Reply backwards = Send(night[0]);
  EXPECT_EQ(backwards.outcome(), v1::REFUSED);
  EXPECT_NE(backwards.reason().find("scans"), std::string::npos);
  formats::Recording bad = night[2];
  bad.samples[100] = std::nan("");
  const v1::Reply nan = Send(bad);
  EXPECT_EQ(nan.outcome(), v1::REFUSED);
  EXPECT_NE(nan.reason().find("finite"), std::string::npos);
  EXPECT_EQ(Show("a").records(0).snapshots(), 1U);
  EXPECT_EQ(Send(night[2]).outcome(), v1::ACCEPTED);
}

TEST_F(DaemonTest, GarbageNeverBringsItDown) {
  WriteSettings("largest_message_bytes = 65536\n");
  StartDaemon();
  std::mt19937 random(1);
  std::vector<std::string> frames;
  for (std::size_t size : {0U, 1U, 7U, 100U, 5000U, 65536U, 65537U, 200000U}) {
    std::string frame(size, '\0');
    for (char& c : frame) c = static_cast<char>(random());
    frames.push_back(std::move(frame));
  }
  for (const std::string& first : frames) {
    for (const std::size_t count : {1U, 2U, 3U, 9U}) {
      std::vector<std::string_view> request(count, first);
      const auto reply = SendFrames(request);
      ASSERT_TRUE(reply) << first.size() << " bytes, " << count << " frames";
      EXPECT_EQ(reply->outcome(), v1::REFUSED);
      EXPECT_FALSE(reply->reason().empty());
    }
  }
  // Far beyond what is allowed the connection is cut instead; nobody else suffers.
  const std::string huge(10 << 20, 'x');
  EXPECT_FALSE(SendFrames({huge}, 500));
  // Not even a ZeroMQ greeting.
  const int plain = ::socket(AF_UNIX, SOCK_STREAM, 0);
  sockaddr_un address{};
  address.sun_family = AF_UNIX;
  RequestEndpoint().copy(address.sun_path, sizeof(address.sun_path) - 1, 6);
  ASSERT_EQ(::connect(plain, reinterpret_cast<const sockaddr*>(&address), sizeof(address)), 0);
  EXPECT_GT(::write(plain, huge.data(), 1000), 0);
  ::close(plain);
  EXPECT_EQ(Send(Night("a", 1)[0]).outcome(), v1::ACCEPTED);
  EXPECT_EQ(StopDaemon(SIGTERM).code, 0);
}

TEST_F(DaemonTest, ARestartChangesNoAdvice) {
  const auto night = Night("a", 9);
  const auto expected = Uninterrupted(night);
  StartDaemon();
  for (std::size_t i = 0; i < night.size(); ++i) {
    if (i == 3) {
      EXPECT_EQ(StopDaemon(SIGTERM).code, 0);
      StartDaemon();
    }
    if (i == 6) {
      EXPECT_EQ(StopDaemon(SIGKILL).code, 128 + SIGKILL);  // as when the power fails
      EXPECT_TRUE(std::filesystem::exists(Path("run/request.sock")));
      StartDaemon();  // over the dead one's socket files
    }
    const v1::Reply reply = Send(night[i]);
    EXPECT_EQ(reply.outcome(), v1::ACCEPTED) << reply.reason();
    EXPECT_TRUE(MessageDifferencer::Equals(reply.advice(), expected[i])) << i;
  }
  EXPECT_EQ(Send(night[1]).outcome(), v1::REPEATED);
  EXPECT_EQ(Show("a").records(0).snapshots(), 9U);
}

TEST_F(DaemonTest, WhatWasAcknowledgedSurvivesAKill) {
  const auto night = Night("a", 20);
  const auto expected = Uninterrupted(night);
  for (std::size_t i = 0; i < night.size(); ++i) {
    if (i % 4 == 0) StartDaemon();
    ASSERT_EQ(Send(night[i]).outcome(), v1::ACCEPTED);
    if (i % 4 == 3) StopDaemon(SIGKILL);  // at once after the receipt
  }
  StartDaemon();
  EXPECT_TRUE(MessageDifferencer::Equals(Show("a").advice(), expected.back()));
  EXPECT_EQ(Show("a").records(0).snapshots(), 20U);
}

TEST_F(DaemonTest, SaysFailedWhileTheLedgerCannotBeWritten) {
  StartDaemon();
  const auto night = Night("a", 3);
  const auto expected = Uninterrupted(night);
  Send(night[0]);
  {
    SQLite::Database other(Path("state/ledger.sqlite"), SQLite::OPEN_READWRITE);
    other.exec("BEGIN IMMEDIATE");
    const v1::Reply reply = Send(night[1]);
    EXPECT_EQ(reply.outcome(), v1::FAILED);
    EXPECT_NE(reply.reason().find("ledger"), std::string::npos) << reply.reason();
  }
  for (std::size_t i = 1; i < 3; ++i) {
    const v1::Reply reply = Send(night[i]);
    EXPECT_EQ(reply.outcome(), v1::ACCEPTED) << reply.reason();
    EXPECT_TRUE(MessageDifferencer::Equals(reply.advice(), expected[i]));
  }
}

TEST_F(DaemonTest, TellsOfSilenceAndTakesItBack) {
  WriteSettings("silent_after_intervals = 2\n");
  StartDaemon();
  const auto night = Night("a", 4, 0.3);
  for (int i = 0; i < 3; ++i)
    ASSERT_EQ(Send(night[static_cast<std::size_t>(i)]).outcome(), v1::ACCEPTED);
  EXPECT_NE(Show("a").advice().verdict(), v1::INSPECT);
  std::this_thread::sleep_for(std::chrono::milliseconds(1500));
  const v1::Advice silent = Show("a").advice();
  EXPECT_EQ(silent.verdict(), v1::INSPECT) << silent.because();
  ASSERT_GT(silent.findings_size(), 0);
  EXPECT_EQ(silent.findings(silent.findings_size() - 1).kind(), v1::SILENT);
  const v1::Reply next = Send(night[3]);
  EXPECT_EQ(next.outcome(), v1::ACCEPTED) << next.reason();
  EXPECT_TRUE(MessageDifferencer::Equals(next.advice(), Uninterrupted(night)[3]));
}

TEST_F(DaemonTest, ASecondDaemonIsRefusedAndTheFirstGoesOn) {
  StartDaemon();
  Ended second = RunWithSettings();
  EXPECT_EQ(second.code, 1);
  EXPECT_TRUE(IsOneLine(second.err, "in use by another lastscand"));
  // With a ledger of its own it must not take the socket away either.
  Write("other.toml", "ledger_path = \"" + Path("other.sqlite") + "\"\n[service]\n" +
                          "request_endpoint = \"" + RequestEndpoint() + "\"\n");
  second = RunDaemon({"--settings", Path("other.toml")});
  EXPECT_EQ(second.code, 1);
  EXPECT_TRUE(IsOneLine(second.err, "another lastscand listens there"));
  EXPECT_EQ(Send(Night("a", 1)[0]).outcome(), v1::ACCEPTED);
}

TEST_F(DaemonTest, ANewerLedgerIsRefusedAndLeftAlone) {
  StartDaemon();
  Send(Night("a", 1)[0]);
  StopDaemon(SIGTERM);
  {
    SQLite::Database database(Path("state/ledger.sqlite"), SQLite::OPEN_READWRITE);
    database.exec("PRAGMA user_version=99");
  }
  const auto bytes = [&] {
    std::ifstream file(Path("state/ledger.sqlite"), std::ios::binary);
    return std::string(std::istreambuf_iterator<char>(file), {});
  };
  const std::string before = bytes();
  const Ended ended = RunWithSettings();
  EXPECT_EQ(ended.code, 1);
  EXPECT_TRUE(IsOneLine(ended.err, "is of version 99"));
  EXPECT_EQ(bytes(), before);
}

TEST_F(DaemonTest, PlacesThatCannotBeUsedAreNamed) {
  // Root may write anywhere; a file where a folder should be stops even root.
  Write("file", "");
  const auto with = [&](const std::string& endpoint) {
    Write("other.toml", "ledger_path = \"" + Path("other.sqlite") +
                            "\"\n[service]\nrequest_endpoint = \"" + endpoint + "\"\n");
    return RunDaemon({"--settings", Path("other.toml")});
  };
  Ended ended = with("ipc://" + Path("file/request.sock"));
  EXPECT_EQ(ended.code, 1);
  EXPECT_TRUE(IsOneLine(ended.err, "cannot be made"));
  ended = with("ipc://" + Path("file"));
  EXPECT_EQ(ended.code, 1);
  EXPECT_TRUE(IsOneLine(ended.err, "a file that is no socket is in the way"));
  EXPECT_TRUE(std::filesystem::exists(Path("file")));
  if (::geteuid() != 0) {
    std::filesystem::create_directory(Path("locked"));
    std::filesystem::permissions(Path("locked"), std::filesystem::perms::owner_read);
    ended = with("ipc://" + Path("locked/request.sock"));
    EXPECT_EQ(ended.code, 1);
    EXPECT_TRUE(IsOneLine(ended.err, "cannot be written"));
    std::filesystem::permissions(Path("locked"), std::filesystem::perms::owner_all);
  }
  Write("other.toml", "ledger_path = \"" + Path("file/ledger.sqlite") + "\"\n");
  ended = RunDaemon({"--settings", Path("other.toml")});
  EXPECT_EQ(ended.code, 1);
  EXPECT_TRUE(IsOneLine(ended.err, "cannot be made"));
  Write("other.toml", "ledger_path = \"" + Path("other.sqlite") + "\"\n[log]\ntarget = \"" +
                          Path("file/log") + "\"\n");
  ended = RunDaemon({"--settings", Path("other.toml")});
  EXPECT_EQ(ended.code, 1);
  EXPECT_TRUE(IsOneLine(ended.err, "log file"));
}

TEST_F(DaemonTest, ChecksSettingsAndExits) {
  Ended ended = RunDaemon({"--settings", LASTSCAN_SOURCE_DIR "/config/lastscan.toml", "--check"});
  EXPECT_EQ(ended.code, 0) << ended.err;
  EXPECT_NE(ended.out.find("settings are good"), std::string::npos);
  EXPECT_TRUE(ended.err.empty());
  const std::string bad = Write("bad.toml", "[log]\nlevel = \"info\"\n\n[service]\nmost = 3\n");
  ended = RunDaemon({"--settings", bad, "--check"});
  EXPECT_EQ(ended.code, 1);
  EXPECT_TRUE(ended.out.empty());
  EXPECT_TRUE(IsOneLine(ended.err, bad + ":5: service.most: unknown key"));
  // Without --check it does not start either.
  EXPECT_EQ(RunDaemon({"--settings", bad}).code, 1);
  ended = RunDaemon({"--settings", Path("missing.toml"), "--check"});
  EXPECT_EQ(ended.code, 1);
  EXPECT_TRUE(IsOneLine(ended.err, Path("missing.toml") + ": there is no such file"));
  EXPECT_FALSE(std::filesystem::exists(Path("state")));
}

TEST_F(DaemonTest, HelpVersionAndWrongUse) {
  Ended ended = RunDaemon({"--help"});
  EXPECT_EQ(ended.code, 0);
  EXPECT_NE(ended.out.find("--settings"), std::string::npos);
  EXPECT_NE(ended.out.find(engine::CautionInShort()), std::string::npos);
  ended = RunDaemon({"--version"});
  EXPECT_EQ(ended.code, 0);
  EXPECT_EQ(ended.out.rfind("lastscand ", 0), 0U);
  ended = RunDaemon({"--wrong"});
  EXPECT_EQ(ended.code, 2);
  EXPECT_FALSE(ended.err.empty());
}

TEST_F(DaemonTest, LogsToARotatingFile) {
  WriteSettings("", "[log]\ntarget = \"" + Path("lastscand.log") +
                        "\"\nrotate_bytes = 4096\nrotate_files = 2\n");
  StartDaemon();
  for (const auto& recording : Night("a", 60)) Send(recording);
  const Ended ended = StopDaemon(SIGTERM);
  EXPECT_TRUE(ended.err.empty()) << ended.err;
  EXPECT_TRUE(std::filesystem::exists(Path("lastscand.log")));
  EXPECT_TRUE(std::filesystem::exists(Path("lastscand.1.log")));
  EXPECT_TRUE(std::filesystem::exists(Path("lastscand.2.log")));
  EXPECT_FALSE(std::filesystem::exists(Path("lastscand.3.log")));
  EXPECT_LE(std::filesystem::file_size(Path("lastscand.1.log")), 4096U + 512U);
}

}  // namespace
}  // namespace lastscan::daemon_tests
