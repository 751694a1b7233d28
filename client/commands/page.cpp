// lastscan page: the live web page, fed from the daemon.
#include "page/page.h"

#include <memory>

#include "commands/command.h"
#include "commands/connection.h"
#include "commands/number_option.h"
#include "commands/run_view.h"

namespace lastscan::commands {
namespace {

constexpr std::uint64_t kHighestPort = 65535;

struct PageCommandOptions {
  std::string endpoint;
  std::string listen = "127.0.0.1:8732";
};

int ServePage(const PageCommandOptions& options) {
  page::PageOptions serve;
  const std::size_t colon = options.listen.rfind(':');
  if (colon == std::string::npos || colon == 0) {
    throw WrongUse("--listen must be HOST:PORT, such as 127.0.0.1:8732, not \"" + options.listen +
                   "\"");
  }
  serve.host = options.listen.substr(0, colon);
  if (serve.host.size() > 2 && serve.host.front() == '[' && serve.host.back() == ']') {
    serve.host = serve.host.substr(1, serve.host.size() - 2);
  }
  const std::string port = options.listen.substr(colon + 1);
  // Port 0 asks for any free one.
  serve.port =
      port == "0" ? 0 : static_cast<int>(ReadCount("the port of --listen", port, kHighestPort));

  // Both readers are called from one thread that is not this one: the
  // connection is made there, at the first call.
  auto connection = std::make_shared<std::unique_ptr<Connection>>();
  const auto connected = [connection, endpoint = options.endpoint]() -> Connection& {
    if (!*connection) *connection = std::make_unique<Connection>(endpoint);
    return **connection;
  };
  serve.daemon_endpoint = options.endpoint.empty() ? DefaultEndpoint() : options.endpoint;
  serve.read_runs = [connected] {
    v1::Request request;
    request.mutable_list_runs();
    const v1::Reply reply = AskOrFail(connected(), request);
    return std::vector<v1::Advice>(reply.runs().begin(), reply.runs().end());
  };
  serve.read_history = [connected](const std::string& run) {
    return AskForRun(connected(), run).history;
  };
  return page::Serve(serve);
}

}  // namespace

void AddPage(CLI::App& program, Job& job) {
  auto options = std::make_shared<PageCommandOptions>();
  CLI::App* command = program.add_subcommand("page", "Serves a live web page of all runs");
  command->add_option("--listen", options->listen, "where to serve; a loopback address")
      ->type_name("HOST:PORT")
      ->capture_default_str();
  AddEndpointOption(*command, options->endpoint);
  command->footer("Example:\n  lastscan page --listen 127.0.0.1:8732");
  command->callback([options, &job] { job = [options] { return ServePage(*options); }; });
}

}  // namespace lastscan::commands
