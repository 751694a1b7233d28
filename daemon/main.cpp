// lastscand: reads settings, wires ledger, engine and sockets, and runs until it
// is told to stop.
#include <google/protobuf/stubs/logging.h>
#include <signal.h>
#include <spdlog/spdlog.h>
#include <sys/signalfd.h>
#include <unistd.h>

#include <CLI/CLI.hpp>
#include <cerrno>
#include <cstdio>
#include <cstring>
#include <exception>
#include <string>
#include <system_error>

#include "engine/advice/cautions.h"
#include "ledger/ledger.h"
#include "service/log.h"
#include "service/readiness.h"
#include "service/service.h"
#include "service/settings_file.h"

namespace {

constexpr int kFailed = 1;
constexpr int kUsage = 2;

// A descriptor that can be read once the process is asked to stop. Blocks the
// signals for all threads made later, so call it before the first one.
int StopDescriptor() {
  sigset_t signals;
  sigemptyset(&signals);
  for (const int number : {SIGTERM, SIGINT, SIGHUP}) sigaddset(&signals, number);
  ::pthread_sigmask(SIG_BLOCK, &signals, nullptr);
  ::signal(SIGPIPE, SIG_IGN);
  const int descriptor = ::signalfd(-1, &signals, SFD_CLOEXEC | SFD_NONBLOCK);
  if (descriptor < 0) {
    throw std::system_error(errno, std::generic_category(), "signals cannot be awaited");
  }
  return descriptor;
}

void Run(const lastscan::v1::Settings& settings) {
  const int stop = StopDescriptor();
  lastscan::service::StartLog(settings.log());
  try {
    lastscan::ledger::Ledger book(settings.ledger_path());
    {
      lastscan::service::Service service(settings, book);
      lastscan::service::LogStart(settings, LASTSCAN_VERSION);
      lastscan::service::TellReady("takes snapshots at " + settings.service().request_endpoint());
      service.Serve(stop);
      lastscan::service::TellStopping();
    }
    spdlog::info("stopped; every accepted snapshot is in the ledger");
  } catch (const std::exception& error) {
    // main says it on standard error; a log kept elsewhere must have it too.
    if (settings.log().target().front() == '/') spdlog::critical("gave up: {}", error.what());
    throw;
  }
  ::close(stop);
}

}  // namespace

int main(int argc, char** argv) {
  // A request that is no message gets a reply; the library's own line about it
  // would only fill the log.
  google::protobuf::SetLogHandler(nullptr);
  CLI::App app(
      "lastscand takes the partly accumulated data of running experiments and advises how many "
      "scans they still need.",
      "lastscand");
  std::string path;
  bool check = false;
  app.add_option("--settings", path, "read settings from this TOML file")->type_name("FILE");
  app.add_flag("--check", check, "test the settings, say whether they are good, and exit");
  app.set_version_flag("--version", std::string("lastscand ") + LASTSCAN_VERSION);
  app.footer(std::string("Without --settings it uses its own: sockets and ledger in your state "
                         "directory.\nStop it with SIGTERM or Ctrl-C.\n") +
             std::string(lastscan::engine::CautionInShort()));
  try {
    app.parse(argc, argv);
  } catch (const CLI::ParseError& error) {
    return app.exit(error) == 0 ? 0 : kUsage;
  }
  try {
    const lastscan::v1::Settings settings = path.empty() ? lastscan::service::EmbeddedSettings()
                                                         : lastscan::service::ReadSettings(path);
    if (check) {
      std::printf("%s: settings are good\n", path.empty() ? "without a file" : path.c_str());
      return 0;
    }
    Run(settings);
    return 0;
  } catch (const std::exception& error) {
    std::fprintf(stderr, "lastscand: %s\n", error.what());
    return kFailed;
  }
}
