// lastscan watch: the daemon's advice as it comes, redrawn in place on a
// terminal and as plain lines elsewhere.
#include <poll.h>
#include <unistd.h>

#include <array>
#include <chrono>
#include <csignal>
#include <iostream>
#include <memory>
#include <optional>

#include "commands/command.h"
#include "commands/connection.h"
#include "commands/run_view.h"
#include "commands/screen.h"
#include "commands/signals.h"
#include "commands/terminal.h"
#include "commands/watch_view.h"

namespace lastscan::commands {
namespace {

using Clock = std::chrono::steady_clock;

// How often the daemon is asked for the whole list: finds what a broadcast
// missed, and tells that the daemon is gone.
constexpr std::chrono::seconds kAskEvery{5};
constexpr std::chrono::seconds kAwayAfter{12};
constexpr std::chrono::milliseconds kLongestWait{1000};

struct WatchOptions {
  std::string endpoint;
  std::string run;
};

class Watcher {
 public:
  explicit Watcher(const WatchOptions& options)
      : signals_({SIGINT, SIGTERM, SIGHUP, SIGWINCH, SIGTSTP}),
        connection_(options.endpoint, signals_.descriptor()),
        view_(options.run, connection_.endpoint()) {}

  int Run() {
    // Listening begins before the list is asked for, so that no advice falls
    // between the two; older advice never replaces newer.
    v1::Request ping;
    ping.mutable_ping();
    Listen(AskOrFail(connection_, ping).broadcast_endpoint());
    v1::Request list;
    list.mutable_list_runs();
    const v1::Reply runs = AskOrFail(connection_, list);
    for (const v1::Advice& advice : runs.runs()) view_.Take(advice);
    view_.RequireRun();
    heard_at_ = Clock::now();

    const bool on_terminal = isatty(STDIN_FILENO) && isatty(STDOUT_FILENO);
    if (on_terminal) {
      screen_ = std::make_unique<Screen>();
    } else {
      printer_.CautionsFirst();
      for (const v1::Advice& advice : view_.Latest()) Print(advice);
    }
    while (Step()) {
    }
    screen_.reset();
    printer_.Close();  // the screen had room for a short caution only
    return kDone;
  }

 private:
  void Listen(const std::string& endpoint) {
    if (endpoint.empty()) throw Failure("the daemon does not say where it broadcasts");
    if (endpoint == listening_to_) return;
    broadcasts_ = zmq::socket_t(SocketContext(), zmq::socket_type::sub);
    broadcasts_.set(zmq::sockopt::linger, 0);
    broadcasts_.set(zmq::sockopt::subscribe, "");
    broadcasts_.connect(endpoint);
    listening_to_ = endpoint;
  }

  void Print(const v1::Advice& advice) { printer_.Print(advice, view_.NameColumn(advice)); }

  // One round: draw, wait, take what came. False: time to leave.
  bool Step() {
    if (screen_) {
      FetchHistory();
      screen_->Show(view_.Draw(screen_->columns(), screen_->rows(), StyleOf(STDOUT_FILENO)));
    }
    std::array<zmq::pollitem_t, 4> items = {
        zmq::pollitem_t{broadcasts_.handle(), 0, ZMQ_POLLIN, 0},
        zmq::pollitem_t{connection_.socket().handle(), 0, ZMQ_POLLIN, 0},
        zmq::pollitem_t{nullptr, signals_.descriptor(), ZMQ_POLLIN, 0},
        zmq::pollitem_t{nullptr, STDIN_FILENO, ZMQ_POLLIN, 0}};
    try {
      zmq::poll(items.data(), screen_ ? 4 : 3, kLongestWait);
    } catch (const zmq::error_t& error) {
      if (error.num() != EINTR) throw;
    }
    TakeBroadcasts();
    TakeReply();
    AskNow();
    return TakeSignals() && TakeKeys(items[3].revents);
  }

  void TakeBroadcasts() {
    for (;;) {
      zmq::message_t topic;
      if (!broadcasts_.recv(topic, zmq::recv_flags::dontwait)) return;
      zmq::message_t body;
      bool more = topic.more();
      while (more) {
        zmq::message_t frame;
        if (!broadcasts_.recv(frame, zmq::recv_flags::dontwait)) break;
        more = frame.more();
        if (body.size() == 0) body = std::move(frame);
      }
      v1::Advice advice;
      // What is not an advice comes from a newer daemon, or from another program.
      if (!advice.ParseFromArray(body.data(), static_cast<int>(body.size()))) continue;
      if (advice.run().empty()) continue;
      heard_at_ = Clock::now();
      TakeAdvice(advice);
    }
  }

  void TakeAdvice(const v1::Advice& advice) {
    if (view_.Take(advice) && !screen_) Print(advice);
  }

  // Replies are taken when they come, so that keys work while a daemon is slow.
  void TakeReply() {
    std::optional<v1::Reply> reply = connection_.Take();
    if (!reply) return;
    heard_at_ = Clock::now();
    waiting_ = false;
    if (view_.away()) {
      view_.set_away(false);
      if (!screen_) Complain("the daemon at " + connection_.endpoint() + " answers again");
    }
    if (!reply->broadcast_endpoint().empty()) Listen(reply->broadcast_endpoint());
    if (!asked_history_.empty()) {
      if (reply->outcome() == v1::ANSWERED) view_.TakeHistory(asked_history_, *reply);
      asked_history_.clear();
      return;
    }
    for (const v1::Advice& advice : reply->runs()) TakeAdvice(advice);
  }

  void AskNow() {
    const auto now = Clock::now();
    if (now - heard_at_ > kAwayAfter && !view_.away()) {
      view_.set_away(true);
      if (!screen_) {
        Complain("the daemon at " + connection_.endpoint() +
                 " does not answer: waiting until it does");
      }
    }
    if (now - asked_at_ < kAskEvery) return;
    asked_history_.clear();
    v1::Request list;
    list.mutable_list_runs();
    Ask(list);
  }

  // The earlier advice of the run on screen, once a run.
  void FetchHistory() {
    if (waiting_ || view_.away()) return;
    const std::string run = view_.WantsHistory();
    if (run.empty()) return;
    asked_history_ = run;
    Ask(RunQuestion(run));
  }

  void Ask(const v1::Request& request) {
    connection_.Begin(request);
    asked_at_ = Clock::now();
    waiting_ = true;
  }

  bool TakeSignals() {
    while (const std::optional<int> signal = signals_.Take()) {
      if (*signal == SIGTSTP) {
        if (screen_) screen_->Leave();
        raise(SIGSTOP);
        if (screen_) screen_->Enter();
      } else if (*signal != SIGWINCH) {
        return false;
      }
    }
    return true;
  }

  bool TakeKeys(short ready) {
    if (!screen_) return true;
    for (;;) {
      switch (screen_->Take()) {
        case Key::kQuit:
          return false;
        case Key::kUp:
          view_.Select(-1);
          break;
        case Key::kDown:
          view_.Select(1);
          break;
        case Key::kNone:
          // A terminal that has gone away is readable for ever and gives nothing.
          return (ready & ZMQ_POLLERR) == 0;
      }
    }
  }

  Signals signals_;
  Connection connection_;
  WatchView view_;
  AdvicePrinter printer_{false};
  zmq::socket_t broadcasts_;
  std::string listening_to_;
  std::unique_ptr<Screen> screen_;
  Clock::time_point heard_at_;
  Clock::time_point asked_at_ = Clock::now();
  std::string asked_history_;  // run whose history the request under way asks for
  bool waiting_ = false;
};

}  // namespace

void AddWatch(CLI::App& program, Job& job) {
  auto options = std::make_shared<WatchOptions>();
  CLI::App* command = program.add_subcommand(
      "watch", "Shows advice as it comes: live on a terminal, one line each elsewhere");
  command->add_option("RUN", options->run, "only this run");
  AddEndpointOption(*command, options->endpoint);
  command->footer(
      "Keys on a terminal: up and down choose a run, q quits.\n"
      "Examples:\n"
      "  lastscan watch\n"
      "  lastscan watch night-12 >> advice.log");
  command->callback([options, &job] { job = [options] { return Watcher(*options).Run(); }; });
}

}  // namespace lastscan::commands
