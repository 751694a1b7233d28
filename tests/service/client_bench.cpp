// A bench for tests of the real `lastscan`: see client_bench.h.
#include "service/client_bench.h"

#include <fcntl.h>
#include <stdlib.h>
#include <sys/wait.h>
#include <unistd.h>

#include <algorithm>
#include <csignal>
#include <fstream>
#include <iterator>
#include <thread>
#include <utility>

#include "formats/jcamp_dx.h"

namespace lastscan::testing {
namespace {

namespace fs = std::filesystem;

std::string Contents(const fs::path& path) {
  std::ifstream file(path, std::ios::binary);
  return {std::istreambuf_iterator<char>(file), {}};
}

int CodeOf(int status) { return WIFEXITED(status) ? WEXITSTATUS(status) : 128 + WTERMSIG(status); }

}  // namespace

Running::Running(pid_t process, fs::path out, fs::path err)
    : process_(process), out_(std::move(out)), err_(std::move(err)) {}

Running::Running(Running&& other) noexcept { *this = std::move(other); }

Running& Running::operator=(Running&& other) noexcept {
  std::swap(process_, other.process_);
  std::swap(out_, other.out_);
  std::swap(err_, other.err_);
  return *this;
}

Running::~Running() {
  if (process_ > 0) Stop(SIGKILL);
}

std::string Running::out() const { return Contents(out_); }
std::string Running::err() const { return Contents(err_); }

Finished Running::Wait() {
  int status = 0;
  waitpid(process_, &status, 0);
  process_ = -1;
  return {CodeOf(status), out(), err()};
}

Finished Running::Stop(int signal) {
  kill(process_, signal);
  return Wait();
}

void ClientBench::SetUp() {
  // Short: the path of a socket has a small limit.
  std::string name = (fs::temp_directory_path() / "lastscan-XXXXXX").string();
  ASSERT_NE(mkdtemp(name.data()), nullptr);
  folder_ = name;
  fs::create_directories(folder_ / "run");
}

void ClientBench::TearDown() { fs::remove_all(folder_); }

Running ClientBench::Start(const std::string& program, const std::vector<std::string>& arguments) {
  const std::string count = std::to_string(started_++);
  const fs::path out = folder_ / ("out-" + count);
  const fs::path err = folder_ / ("err-" + count);
  const pid_t process = fork();
  if (process == 0) {
    const int input = open("/dev/null", O_RDONLY);
    const int output = open(out.c_str(), O_WRONLY | O_CREAT | O_TRUNC, 0600);
    const int errors = open(err.c_str(), O_WRONLY | O_CREAT | O_TRUNC, 0600);
    dup2(input, STDIN_FILENO);
    dup2(output, STDOUT_FILENO);
    dup2(errors, STDERR_FILENO);
    setenv("HOME", folder_.c_str(), 1);
    setenv("XDG_RUNTIME_DIR", (folder_ / "run").c_str(), 1);
    for (const char* name : {"XDG_STATE_HOME", "STATE_DIRECTORY", "RUNTIME_DIRECTORY",
                             "LASTSCAN_AT", "NOTIFY_SOCKET"}) {
      unsetenv(name);
    }
    std::vector<char*> line = {const_cast<char*>(program.c_str())};
    for (const std::string& argument : arguments) {
      line.push_back(const_cast<char*>(argument.c_str()));
    }
    line.push_back(nullptr);
    execv(program.c_str(), line.data());
    _exit(127);
  }
  return Running(process, out, err);
}

Finished ClientBench::Client(const std::vector<std::string>& arguments) {
  return StartClient(arguments).Wait();
}

Running ClientBench::StartClient(const std::vector<std::string>& arguments) {
  return Start(LASTSCAN_CLIENT, arguments);
}

Running ClientBench::StartDaemon() {
  Running daemon = Start(LASTSCAN_DAEMON, {});
  EXPECT_TRUE(Within(std::chrono::seconds(30), [this] { return Client({"runs"}).code == 0; }))
      << daemon.err();
  return daemon;
}

std::string ClientBench::Write(const std::string& name, const std::string& text) {
  fs::create_directories(fs::path(Path(name)).parent_path());
  std::ofstream(Path(name), std::ios::binary) << text;
  return Path(name);
}

std::string ClientBench::Write(const std::string& name, const formats::Recording& recording) {
  fs::create_directories(fs::path(Path(name)).parent_path());
  std::ofstream file(Path(name), std::ios::binary);
  formats::WriteJcampDx(file, recording);
  return Path(name);
}

std::string ClientBench::Read(const std::string& path) const { return Contents(path); }

rehearsal::InventedSample ClientBench::Sample() {
  rehearsal::InventedSample sample;
  sample.points = 2048;
  sample.spectral_width_hz = 8000;
  sample.broadening_hz = 2;
  sample.lines = {{100.5, 3, 1.5, 0}};
  sample.scans_planned = 512;
  return sample;
}

bool ClientBench::Within(std::chrono::milliseconds limit, const std::function<bool()>& condition) {
  const auto end = std::chrono::steady_clock::now() + limit;
  while (!condition()) {
    if (std::chrono::steady_clock::now() > end) return false;
    std::this_thread::sleep_for(std::chrono::milliseconds(50));
  }
  return true;
}

::testing::AssertionResult IsOneErrorLine(const std::string& text) {
  if (!text.starts_with("lastscan: ") || std::count(text.begin(), text.end(), '\n') != 1 ||
      text.back() != '\n') {
    return ::testing::AssertionFailure() << "not one error line: \"" << text << "\"";
  }
  return ::testing::AssertionSuccess();
}

}  // namespace lastscan::testing
