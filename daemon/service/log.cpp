// Sets the log up: journal, standard error or a rotating file.
#include "service/log.h"

#include <spdlog/pattern_formatter.h>
#include <spdlog/sinks/rotating_file_sink.h>
#include <spdlog/sinks/stdout_sinks.h>
#include <spdlog/spdlog.h>
#include <sys/stat.h>
#include <unistd.h>

#include <array>
#include <cstdio>
#include <cstdlib>
#include <memory>
#include <string_view>

#include "engine/advice/cautions.h"

namespace lastscan::service {
namespace {

// The priority of a line as sd-daemon(3) has it: 3 error, 4 warning, 6
// information, 7 debugging.
class Priority : public spdlog::custom_flag_formatter {
 public:
  void format(const spdlog::details::log_msg& message, const std::tm&,
              spdlog::memory_buf_t& line) override {
    constexpr std::array<std::string_view, 7> kPriorities = {"<7>", "<7>", "<6>", "<4>",
                                                             "<3>", "<2>", "<6>"};
    const std::string_view priority = kPriorities[static_cast<std::size_t>(message.level)];
    line.append(priority.data(), priority.data() + priority.size());
  }
  std::unique_ptr<custom_flag_formatter> clone() const override {
    return std::make_unique<Priority>();
  }
};

// The service manager names the journal's stream in JOURNAL_STREAM as DEVICE:INODE;
// a child that has redirected its standard error must not be fooled by it.
bool StandardErrorIsJournal() {
  const char* stream = std::getenv("JOURNAL_STREAM");
  struct stat status {};
  if (stream == nullptr || ::fstat(STDERR_FILENO, &status) != 0) return false;
  return std::string(stream) == std::to_string(status.st_dev) + ":" + std::to_string(status.st_ino);
}

std::shared_ptr<spdlog::logger> MakeLogger(const v1::LogSettings& settings) {
  if (settings.target() != "journal" && settings.target() != "stderr") {
    try {
      auto logger = spdlog::rotating_logger_mt("lastscand", settings.target(),
                                               settings.rotate_bytes(), settings.rotate_files());
      logger->set_pattern("%Y-%m-%dT%H:%M:%S.%e%z %l %v");
      return logger;
    } catch (const spdlog::spdlog_ex& error) {
      throw LogError("log file " + settings.target() + " cannot be written: " + error.what() +
                     "; mend its rights, or name another (log.target)");
    }
  }
  auto logger = spdlog::stderr_logger_mt("lastscand");
  if (settings.target() == "journal" && StandardErrorIsJournal()) {
    auto formatter = std::make_unique<spdlog::pattern_formatter>();
    formatter->add_flag<Priority>('*').set_pattern("%*%v");
    logger->set_formatter(std::move(formatter));
  } else {
    logger->set_pattern("%H:%M:%S %l %v");
  }
  return logger;
}

}  // namespace

void StartLog(const v1::LogSettings& settings) {
  spdlog::drop("lastscand");
  const mode_t mask = ::umask(077);
  try {
    auto logger = MakeLogger(settings);
    ::umask(mask);
    logger->set_level(spdlog::level::from_str(settings.level()));
    logger->flush_on(spdlog::level::info);
    spdlog::set_default_logger(logger);
  } catch (...) {
    ::umask(mask);
    throw;
  }
}

void LogStart(const v1::Settings& settings, const std::string& version) {
  for (std::string_view caution : engine::Cautions()) spdlog::info("caution: {}", caution);
  spdlog::info("lastscand {} takes snapshots and questions at {}", version,
               settings.service().request_endpoint());
  spdlog::info("advice is broadcast at {}", settings.service().broadcast_endpoint());
  spdlog::info("ledger: {}", settings.ledger_path());
}

}  // namespace lastscan::service
