// A bench for tests of the real `lastscand`.
#include "daemon_bench.h"

#include <fcntl.h>
#include <signal.h>
#include <sys/wait.h>
#include <unistd.h>

#include <chrono>
#include <cmath>
#include <cstdlib>
#include <fstream>
#include <iterator>
#include <thread>

#include "rehearsal/scenarios.h"

namespace lastscan::daemon_tests {
namespace {

std::string TextOf(const std::string& path) {
  std::ifstream file(path, std::ios::binary);
  return {std::istreambuf_iterator<char>(file), {}};
}

// After fork: only calls that a child of a process with threads may make.
void Redirect(const char* path, int descriptor) {
  const int file = ::open(path, O_WRONLY | O_CREAT | O_TRUNC, 0600);
  if (file >= 0) ::dup2(file, descriptor);
}

}  // namespace

void DaemonBench::SetUp() {
  // Short: the path of a socket has little room.
  std::string name = "/tmp/lastscand-XXXXXX";
  ASSERT_NE(::mkdtemp(name.data()), nullptr);
  folder_ = name;
  WriteSettings();
}

void DaemonBench::TearDown() {
  if (daemon_ > 0) StopDaemon(SIGKILL);
  std::filesystem::permissions(folder_, std::filesystem::perms::owner_all);
  std::filesystem::remove_all(folder_);
}

std::string DaemonBench::Write(const std::string& name, const std::string& text) const {
  std::ofstream(Path(name), std::ios::binary) << text;
  return Path(name);
}

void DaemonBench::WriteSettings(const std::string& service_keys, const std::string& more) {
  Write("settings.toml", "ledger_path = \"" + Path("state/ledger.sqlite") +
                             "\"\n[service]\nrequest_endpoint = \"" + RequestEndpoint() +
                             "\"\nbroadcast_endpoint = \"" + BroadcastEndpoint() + "\"\n" +
                             service_keys + more);
}

pid_t DaemonBench::Spawn(const std::vector<std::string>& arguments, int number) const {
  std::vector<char*> words = {const_cast<char*>(LASTSCAN_DAEMON)};
  for (const std::string& argument : arguments) words.push_back(const_cast<char*>(argument.data()));
  words.push_back(nullptr);
  const std::string out = Path("out" + std::to_string(number));
  const std::string err = Path("err" + std::to_string(number));
  const pid_t process = ::fork();
  if (process == 0) {
    Redirect(out.c_str(), STDOUT_FILENO);
    Redirect(err.c_str(), STDERR_FILENO);
    ::execv(words[0], words.data());
    ::_exit(127);
  }
  return process;
}

Ended DaemonBench::WaitFor(pid_t process, int number) const {
  int status = 0;
  ::waitpid(process, &status, 0);
  return {WIFEXITED(status) ? WEXITSTATUS(status) : 128 + WTERMSIG(status),
          TextOf(Path("out" + std::to_string(number))),
          TextOf(Path("err" + std::to_string(number)))};
}

void DaemonBench::StartDaemon() {
  daemon_number_ = ++started_;
  daemon_ = Spawn({"--settings", Path("settings.toml")}, daemon_number_);
  v1::Request request;
  request.mutable_ping();
  const std::string ping = request.SerializeAsString();
  for (int attempt = 0; attempt < 100; ++attempt) {
    if (SendFrames({ping}, 200)) return;
    ASSERT_EQ(::waitpid(daemon_, nullptr, WNOHANG), 0)
        << "the daemon ended: " << TextOf(Path("err" + std::to_string(daemon_number_)));
  }
  FAIL() << "the daemon does not answer";
}

Ended DaemonBench::StopDaemon(int signal) {
  ::kill(daemon_, signal);
  const Ended ended = WaitFor(daemon_, daemon_number_);
  daemon_ = -1;
  return ended;
}

Ended DaemonBench::RunDaemon(const std::vector<std::string>& arguments) {
  const int number = ++started_;
  return WaitFor(Spawn(arguments, number), number);
}

std::optional<v1::Reply> DaemonBench::SendFrames(const std::vector<std::string_view>& frames,
                                                 int milliseconds) {
  zmq::socket_t socket(context_, zmq::socket_type::dealer);
  socket.set(zmq::sockopt::linger, 0);
  socket.set(zmq::sockopt::rcvtimeo, milliseconds);
  socket.connect(RequestEndpoint());
  for (std::size_t i = 0; i < frames.size(); ++i) {
    socket.send(zmq::buffer(frames[i]),
                i + 1 < frames.size() ? zmq::send_flags::sndmore : zmq::send_flags::none);
  }
  zmq::message_t message;
  v1::Reply reply;
  // The last frame is the reply; a delimiter comes before it if one was sent.
  do {
    if (!socket.recv(message)) return std::nullopt;
  } while (message.more());
  if (!reply.ParseFromArray(message.data(), static_cast<int>(message.size()))) {
    return std::nullopt;
  }
  return reply;
}

v1::Reply DaemonBench::Ask(const v1::Request& request) {
  const auto reply = SendFrames({request.SerializeAsString()});
  EXPECT_TRUE(reply) << "no reply to " << request.ShortDebugString();
  return reply.value_or(v1::Reply());
}

v1::Reply DaemonBench::Send(const formats::Recording& recording) {
  v1::Request request;
  *request.mutable_snapshot() = recording.snapshot;
  const std::string message = request.SerializeAsString();
  const auto reply = SendFrames({message, formats::AsFrame(recording.samples)});
  EXPECT_TRUE(reply) << "no reply to the snapshot of scan " << recording.snapshot.scans_done();
  return reply.value_or(v1::Reply());
}

v1::Reply DaemonBench::Show(const std::string& run) {
  v1::Request request;
  request.mutable_show_run()->set_run(run);
  return Ask(request);
}

std::vector<formats::Recording> DaemonBench::Night(const std::string& run, int looks,
                                                   double seconds) {
  rehearsal::InventedSample sample = rehearsal::StudySample(1.5);
  sample.run = run;
  sample.scans_planned = 4096;
  rehearsal::InventedRun invented(sample, 7);
  std::vector<formats::Recording> recordings;
  for (int look = 1; look <= looks; ++look) {
    recordings.push_back(invented.AdvanceTo(static_cast<std::uint64_t>(8 * look)));
    const double at = 1'800'000'000 + look * seconds;
    auto* recorded = recordings.back().snapshot.mutable_recorded_at();
    recorded->set_seconds(static_cast<std::int64_t>(at));
    recorded->set_nanos(static_cast<std::int32_t>(std::fmod(at, 1.0) * 1e9));
  }
  return recordings;
}

}  // namespace lastscan::daemon_tests
