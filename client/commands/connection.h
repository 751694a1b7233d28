// A conversation with the daemon: one request, one reply.
//
// A connection is cheap to make and speaks to nobody until it is asked. All
// calls are from one thread.
#pragma once

#include <chrono>
#include <memory>
#include <optional>
#include <string>
#include <string_view>
#include <zmq.hpp>

#include "commands/command.h"
#include "formats/recording.h"
#include "lastscan/v1/service.pb.h"

namespace lastscan::commands {

// Nobody answers at the endpoint, or not in time.
class NoAnswer : public Failure {
 public:
  using Failure::Failure;
};

// The wait for an answer was ended by `interrupt` (see Connection).
class Interrupted : public Failure {
 public:
  Interrupted() : Failure("interrupted") {}
};

// Where the daemon listens when nobody says otherwise, by the same rule as the
// daemon's own (daemon/service/places.h): request.sock in $RUNTIME_DIRECTORY,
// else in $XDG_RUNTIME_DIR/lastscan, else in StateFolder().
std::string DefaultEndpoint();

// The folder where the client keeps what it must remember, by the same rule:
// $STATE_DIRECTORY, $XDG_STATE_HOME/lastscan or ~/.local/state/lastscan.
// Throws Failure if none of them is known.
std::string StateFolder();

// Adds --at ENDPOINT to `command`.
void AddEndpointOption(CLI::App& command, std::string& endpoint);

class Connection {
 public:
  // `endpoint` empty: DefaultEndpoint(). `interrupt`: a file descriptor that
  // ends any wait when it becomes readable; -1: none.
  // Throws Failure if `endpoint` is not one.
  explicit Connection(std::string endpoint, int interrupt = -1);

  // Sends `request` with `samples` behind it and waits for the reply. Throws
  // NoAnswer when no daemon is there or it does not answer in time, Interrupted.
  v1::Reply Ask(const v1::Request& request, std::string_view samples = {});

  // Ask in two steps, for a caller that waits for other things too. Begin drops
  // an earlier request that has not been answered.
  void Begin(const v1::Request& request, std::string_view samples = {});
  // The reply if it has come, nothing otherwise. Never waits.
  std::optional<v1::Reply> Take();
  zmq::socket_ref socket() { return socket_; }

  const std::string& endpoint() const { return endpoint_; }

 private:
  void Open();
  bool Wait(std::chrono::milliseconds time);
  // Nothing if no reply comes in time; the next request then starts afresh.
  std::optional<v1::Reply> TryToAsk(const v1::Request& request, std::string_view samples,
                                    std::chrono::milliseconds time);

  std::string endpoint_;
  int interrupt_;
  zmq::socket_t socket_;
  bool answered_before_ = false;
};

// The request that carries one recording, and its reply.
v1::Reply Send(Connection& connection, const formats::Recording& recording);

// The same as Connection::Ask, but a reply that is not an answer (REFUSED,
// FAILED) throws Failure with its reason.
v1::Reply AskOrFail(Connection& connection, const v1::Request& request);

// One context for every socket of the program.
zmq::context_t& SocketContext();

}  // namespace lastscan::commands
