// The server of the page: routes, headers, the thread that asks the daemon, and
// the stream that tells browsers when something changed.
#include "page/page.h"

#include <google/protobuf/util/json_util.h>
#include <httplib.h>
#include <pthread.h>
#include <signal.h>

#include <algorithm>
#include <atomic>
#include <chrono>
#include <cstdio>
#include <iostream>
#include <memory>
#include <thread>

#include "drawing/escape.h"
#include "drawing/progress_figure.h"
#include "page/markup.h"
#include "page/run_book.h"

namespace lastscan::page {
namespace {

using std::chrono_literals::operator""ms;

constexpr int kThreads = 40;  // requests and streams at a time
constexpr int kStreams = 24;  // of which streams, so that requests always get through
constexpr auto kHeartbeat = 10000ms;
constexpr auto kPatience = 2000ms;

bool IsLoopback(const std::string& host) {
  return host == "localhost" || host == "::1" || host.starts_with("127.");
}

// The host of a Host header, without port and brackets.
std::string HostOf(const std::string& header) {
  if (header.starts_with("[")) {
    return header.substr(1, header.find(']') - 1);
  }
  return header.substr(0, header.find(':'));
}

std::string RunsAsJson(const Shelf& shelf) {
  google::protobuf::util::JsonPrintOptions print;
  print.always_print_primitive_fields = true;
  std::string text = "[";
  for (const v1::Advice& advice : shelf.runs) {
    std::string one;
    if (google::protobuf::util::MessageToJsonString(advice, &one, print).ok()) {
      text += (text.size() > 1 ? ",\n" : "") + one;
    }
  }
  return text + "]\n";
}

class PageServer {
 public:
  explicit PageServer(const PageOptions& options) : options_(options) { Route(); }

  int Serve();

 private:
  void Route();
  void Guard();
  void ShowRun(const httplib::Request& request, httplib::Response& response);
  void ShowFigure(const httplib::Request& request, httplib::Response& response);
  void Stream(httplib::Response& response);
  void AskDaemon();

  const PageOptions& options_;
  RunBook book_;
  httplib::Server server_;
  std::atomic<int> streams_ = 0;
  std::atomic<bool> ended_ = false;  // the server listens no more
};

// What every answer carries, and which requests get one at all.
void PageServer::Guard() {
  server_.set_default_headers({
      {"Content-Security-Policy",
       "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self'; "
       "connect-src 'self'; base-uri 'none'; form-action 'none'; frame-ancestors 'none'"},
      {"X-Content-Type-Options", "nosniff"},
      {"Referrer-Policy", "no-referrer"},
      {"Cross-Origin-Resource-Policy", "same-origin"},
      {"Cache-Control", "no-store"},
  });
  server_.set_pre_routing_handler([](const httplib::Request& request, httplib::Response& response) {
    if (request.method != "GET" && request.method != "HEAD") {
      response.status = 405;
      response.set_header("Allow", "GET, HEAD");
      response.set_content("This page only reads: GET or HEAD.\n", "text/plain; charset=utf-8");
      return httplib::Server::HandlerResponse::Handled;
    }
    // A foreign site that points its own name at the loopback address must not
    // read sample names through somebody's browser.
    if (!IsLoopback(HostOf(request.get_header_value("Host")))) {
      response.status = 421;
      response.set_content(
          "This page answers to loopback names only. A proxy in front of it must pass "
          "\"Host: localhost\".\n",
          "text/plain; charset=utf-8");
      return httplib::Server::HandlerResponse::Handled;
    }
    return httplib::Server::HandlerResponse::Unhandled;
  });
  server_.set_error_handler([](const httplib::Request&, httplib::Response& response) {
    if (response.body.empty()) {
      response.set_content(TroublePage("Nothing here", "There is no such page. Go to all runs."),
                           "text/html; charset=utf-8");
    }
  });
}

void PageServer::Route() {
  server_.new_task_queue = [] { return new httplib::ThreadPool(kThreads); };
  Guard();
  const auto constant = [this](const char* path, std::string_view text, const char* type) {
    server_.Get(path, [text, type](const httplib::Request&, httplib::Response& response) {
      response.set_content(text.data(), text.size(), type);
    });
  };
  constant("/page.js", PageScript(), "text/javascript; charset=utf-8");
  constant("/page.css", PageStyle(), "text/css; charset=utf-8");
  constant("/icon.svg", PageIcon(), "image/svg+xml");
  server_.Get("/", [this](const httplib::Request&, httplib::Response& response) {
    response.set_content(RunsPage(book_.Look(), options_.daemon_endpoint, std::time(nullptr)),
                         "text/html; charset=utf-8");
  });
  server_.Get("/runs.json", [this](const httplib::Request&, httplib::Response& response) {
    response.set_content(RunsAsJson(book_.Look()), "application/json");
  });
  server_.Get("/run", [this](const httplib::Request& request, httplib::Response& response) {
    ShowRun(request, response);
  });
  server_.Get("/figure.svg", [this](const httplib::Request& request, httplib::Response& response) {
    ShowFigure(request, response);
  });
  server_.Get("/events",
              [this](const httplib::Request&, httplib::Response& response) { Stream(response); });
}

void PageServer::ShowRun(const httplib::Request& request, httplib::Response& response) {
  const std::string run = request.get_param_value("name");
  const std::vector<v1::Advice> history = book_.History(run, kPatience);
  if (history.empty()) {
    const Shelf shelf = book_.Look();
    response.status = shelf.read_once ? 404 : 503;
    response.set_content(
        shelf.read_once
            ? TroublePage("No such run", "The daemon knows no run \"" + run + "\".")
            : TroublePage("No news yet", "The daemon has not answered yet. Try again shortly."),
        "text/html; charset=utf-8");
    return;
  }
  response.set_content(RunPage(book_.Look(), history, options_.daemon_endpoint),
                       "text/html; charset=utf-8");
}

void PageServer::ShowFigure(const httplib::Request& request, httplib::Response& response) {
  const auto shape = request.get_param_value("shape") == "tall" ? drawing::SvgShape::kTall
                                                                : drawing::SvgShape::kWide;
  drawing::ProgressFigure figure{book_.History(request.get_param_value("name"), kPatience), {}};
  if (figure.history.empty()) {
    response.status = 404;
  }
  // The figure brings its own style; it can load nothing and run nothing.
  response.headers.erase("Content-Security-Policy");
  response.set_header("Content-Security-Policy",
                      "default-src 'none'; style-src 'unsafe-inline'; frame-ancestors 'none'");
  response.set_content(drawing::DrawAsSvg(figure, shape), "image/svg+xml");
}

void PageServer::Stream(httplib::Response& response) {
  if (++streams_ > kStreams) {
    --streams_;
    response.status = 503;
    response.set_content("Too many pages listen already; this one looks again by itself.\n",
                         "text/plain; charset=utf-8");
    return;
  }
  auto seen = std::make_shared<std::uint64_t>(0);
  response.set_chunked_content_provider(
      "text/event-stream",
      [this, seen](std::size_t, httplib::DataSink& sink) {
        const auto version = book_.AwaitChange(*seen, kHeartbeat);
        if (!version) {
          sink.done();
          return true;
        }
        // A comment line keeps the connection known to be alive.
        const std::string text = *version == *seen
                                     ? std::string(": still here\n\n")
                                     : "event: version\ndata: " + std::to_string(*version) + "\n\n";
        *seen = *version;
        return sink.write(text.data(), text.size());
      },
      [this](bool) { --streams_; });
}

void PageServer::AskDaemon() {
  while (!book_.closed()) {
    try {
      book_.Update(options_.read_runs(), std::time(nullptr));
      for (const std::string& run : book_.HistoriesWanted()) {
        book_.PutHistory(
            run, options_.read_history ? options_.read_history(run) : std::vector<v1::Advice>{});
      }
    } catch (const std::exception& failure) {
      book_.DaemonAway(failure.what());
    }
    book_.Rest(std::chrono::duration<double>(options_.seconds_between_reads));
  }
}

int PageServer::Serve() {
  const std::string at = options_.host + ":" + std::to_string(options_.port);
  if (!IsLoopback(options_.host)) {
    std::cerr << "lastscan: the page listens on a loopback address only, not on " << options_.host
              << ": put the lab's own proxy with its log-in in front of it\n";
    return 1;
  }
  int port = options_.port;
  if (port == 0) {
    port = server_.bind_to_any_port(options_.host);
  } else if (!server_.bind_to_port(options_.host, port)) {
    port = -1;
  }
  if (port < 0) {
    std::cerr << "lastscan: cannot serve the page on " << at
              << ": the port is taken or not allowed; choose another with --listen\n";
    return 1;
  }

  // Both signals go to one thread that may do more than a handler may.
  sigset_t stops;
  sigset_t before;
  sigemptyset(&stops);
  sigaddset(&stops, SIGINT);
  sigaddset(&stops, SIGTERM);
  pthread_sigmask(SIG_BLOCK, &stops, &before);
  std::thread stopper([this, &stops] {
    int which = 0;
    sigwait(&stops, &which);
    book_.Close();
    // A stop that comes before the server has begun to listen is lost: repeat.
    while (!ended_) {
      server_.stop();
      std::this_thread::sleep_for(20ms);
    }
  });
  std::thread asker([this] { AskDaemon(); });
  const std::string host = options_.host == "::1" ? "[::1]" : options_.host;
  std::cout << "The page is at http://" << host << ":" << port << "/ (stop with Ctrl-C)"
            << std::endl;
  const bool served = server_.listen_after_bind();
  ended_ = true;
  const bool asked_to_stop = book_.closed();
  book_.Close();
  if (!asked_to_stop) {
    pthread_kill(stopper.native_handle(), SIGTERM);
  }
  stopper.join();
  asker.join();
  pthread_sigmask(SIG_SETMASK, &before, nullptr);
  if (!served && !asked_to_stop) {
    std::cerr << "lastscan: the page at " << at << " stopped: it could not take connections\n";
    return 1;
  }
  return 0;
}

}  // namespace

int Serve(const PageOptions& options) { return PageServer(options).Serve(); }

}  // namespace lastscan::page
