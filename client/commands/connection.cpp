// A conversation with the daemon: see connection.h.
//
// A REQ socket that has lost its reply is stuck by design, so a request that
// is not answered in time costs the socket: the next one opens a new one.
#include "commands/connection.h"

#include <pwd.h>
#include <unistd.h>

#include <array>
#include <cerrno>
#include <cstdlib>
#include <filesystem>

namespace lastscan::commands {
namespace {

namespace fs = std::filesystem;

// A daemon that is there answers a ping at once; one snapshot may wait behind
// those of other instruments.
constexpr std::chrono::milliseconds kPingTime{3000};
constexpr std::chrono::milliseconds kAnswerTime{30000};

constexpr std::string_view kIpc = "ipc://";

// The first folder that the environment variable lists, if it is an absolute
// path; nothing otherwise.
std::optional<fs::path> FolderFrom(const char* variable) {
  const char* value = std::getenv(variable);
  if (value == nullptr) return std::nullopt;
  const std::string folders(value);
  const fs::path first(folders.substr(0, folders.find(':')));
  return first.is_absolute() ? std::optional(first) : std::nullopt;
}

}  // namespace

std::string StateFolder() {
  if (const auto folder = FolderFrom("STATE_DIRECTORY")) return folder->string();
  if (const auto folder = FolderFrom("XDG_STATE_HOME")) return (*folder / "lastscan").string();
  std::optional<fs::path> home = FolderFrom("HOME");
  if (!home) {
    const passwd* user = ::getpwuid(::getuid());
    if (user != nullptr && user->pw_dir != nullptr && user->pw_dir[0] == '/') home = user->pw_dir;
  }
  if (home) return (*home / ".local/state/lastscan").string();
  throw Failure("no folder for what must be remembered: set HOME or XDG_STATE_HOME");
}

std::string DefaultEndpoint() {
  std::optional<fs::path> folder = FolderFrom("RUNTIME_DIRECTORY");
  if (!folder) {
    folder = FolderFrom("XDG_RUNTIME_DIR");
    if (folder) *folder /= "lastscan";
  }
  return std::string(kIpc) + (folder ? folder->string() : StateFolder()) + "/request.sock";
}

void AddEndpointOption(CLI::App& command, std::string& endpoint) {
  command.add_option("--at", endpoint, "the daemon to ask; default: the one of this user")
      ->type_name("ENDPOINT")
      ->envname("LASTSCAN_AT");
}

zmq::context_t& SocketContext() {
  static zmq::context_t context(1);
  return context;
}

Connection::Connection(std::string endpoint, int interrupt)
    : endpoint_(endpoint.empty() ? DefaultEndpoint() : std::move(endpoint)), interrupt_(interrupt) {
  Open();
}

void Connection::Open() {
  socket_ = zmq::socket_t(SocketContext(), zmq::socket_type::req);
  socket_.set(zmq::sockopt::linger, 0);
  try {
    socket_.connect(endpoint_);
  } catch (const zmq::error_t& error) {
    throw Failure("\"" + endpoint_ + "\" is no endpoint (" + error.what() +
                  "): write ipc:///PATH or tcp://HOST:PORT after --at");
  }
}

bool Connection::Wait(std::chrono::milliseconds time) {
  const auto end = std::chrono::steady_clock::now() + time;
  for (;;) {
    std::array<zmq::pollitem_t, 2> items = {zmq::pollitem_t{socket_.handle(), 0, ZMQ_POLLIN, 0},
                                            zmq::pollitem_t{nullptr, interrupt_, ZMQ_POLLIN, 0}};
    const auto left = std::chrono::duration_cast<std::chrono::milliseconds>(
        end - std::chrono::steady_clock::now());
    if (left.count() <= 0) return false;
    try {
      zmq::poll(items.data(), interrupt_ < 0 ? 1 : 2, left);
    } catch (const zmq::error_t& error) {
      if (error.num() != EINTR) throw;
      continue;
    }
    if (items[0].revents != 0) return true;
    if (interrupt_ >= 0 && items[1].revents != 0) throw Interrupted();
  }
}

void Connection::Begin(const v1::Request& request, std::string_view samples) {
  std::string head;
  if (!request.SerializeToString(&head)) throw Failure("the request is too large to send");
  for (int attempt = 0;; ++attempt) {
    const auto flags = samples.empty() ? zmq::send_flags::dontwait
                                       : zmq::send_flags::dontwait | zmq::send_flags::sndmore;
    try {
      if (socket_.send(zmq::buffer(head), flags)) break;
    } catch (const zmq::error_t&) {
      // EFSM: an earlier request was never answered.
    }
    if (attempt > 0) {
      throw NoAnswer("no daemon answers at " + endpoint_ +
                     ": start lastscand or name another with --at");
    }
    Open();
  }
  if (!samples.empty()) socket_.send(zmq::buffer(samples), zmq::send_flags::none);
}

std::optional<v1::Reply> Connection::Take() {
  zmq::message_t frame;
  try {
    if (!socket_.recv(frame, zmq::recv_flags::dontwait)) return std::nullopt;
  } catch (const zmq::error_t&) {
    return std::nullopt;  // EFSM: nothing has been asked
  }
  bool more = frame.more();
  while (more) {
    zmq::message_t rest;
    if (!socket_.recv(rest, zmq::recv_flags::dontwait)) break;
    more = rest.more();
  }
  v1::Reply reply;
  if (!reply.ParseFromArray(frame.data(), static_cast<int>(frame.size()))) {
    throw Failure("what answers at " + endpoint_ + " is no lastscand: name another with --at");
  }
  answered_before_ = true;
  return reply;
}

std::optional<v1::Reply> Connection::TryToAsk(const v1::Request& request, std::string_view samples,
                                              std::chrono::milliseconds time) {
  Begin(request, samples);
  std::optional<v1::Reply> reply;
  if (Wait(time)) reply = Take();
  if (!reply) {
    answered_before_ = false;
    Open();
  }
  return reply;
}

v1::Reply Connection::Ask(const v1::Request& request, std::string_view samples) {
  const NoAnswer nobody("no daemon answers at " + endpoint_ +
                        ": start lastscand or name another with --at");
  if (!answered_before_) {
    const std::string path =
        endpoint_.starts_with(kIpc) ? endpoint_.substr(kIpc.size()) : std::string();
    std::error_code ignored;
    if (!path.empty() && path[0] != '@' && !fs::exists(path, ignored)) throw nobody;
    v1::Request ping;
    ping.mutable_ping();
    if (!request.has_ping() && !TryToAsk(ping, {}, kPingTime)) throw nobody;
  }
  std::optional<v1::Reply> reply =
      TryToAsk(request, samples, request.has_ping() ? kPingTime : kAnswerTime);
  if (reply) return *std::move(reply);
  if (request.has_ping()) throw nobody;
  throw NoAnswer("the daemon at " + endpoint_ +
                 " did not answer within 30 s: ask again, a snapshot sent twice does no harm");
}

v1::Reply Send(Connection& connection, const formats::Recording& recording) {
  v1::Request request;
  *request.mutable_snapshot() = recording.snapshot;
  return connection.Ask(request, formats::AsFrame(recording.samples));
}

v1::Reply AskOrFail(Connection& connection, const v1::Request& request) {
  v1::Reply reply = connection.Ask(request);
  if (reply.outcome() != v1::ANSWERED && reply.outcome() != v1::ACCEPTED) {
    throw Failure(reply.reason().empty() ? "the daemon gave no reason for its refusal"
                                         : reply.reason());
  }
  return reply;
}

}  // namespace lastscan::commands
