// The daemon's loop: one thread that waits for requests, silence and the stop
// signal. One request is served at a time, in the order of arrival, so that a
// run's snapshots never overtake each other.
#pragma once

#include <zmq.hpp>

#include "lastscan/v1/settings.pb.h"
#include "ledger/ledger.h"
#include "service/requests.h"

namespace lastscan::service {

class Service {
 public:
  // Listens at the endpoints of `settings`. `book` outlives this. Throws
  // EndpointError, engine::Refusal, ledger::LedgerError.
  Service(const v1::Settings& settings, ledger::Ledger& book);
  ~Service();

  // Serves until the file descriptor `stop` can be read. Requests that arrived
  // before are answered first, as far as one second allows.
  void Serve(int stop);

 private:
  void ServeWaiting(double seconds);
  bool ServeOne();
  void Broadcast(const v1::Advice& advice);
  int MillisecondsToWait(double alive_due) const;

  v1::ServiceSettings settings_;
  zmq::context_t context_;
  zmq::socket_t requests_socket_;
  zmq::socket_t broadcast_socket_;
  Clocks clocks_ = SystemClocks();
  Requests requests_;
};

}  // namespace lastscan::service
