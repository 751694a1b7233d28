// Endpoints: which ones the daemon may listen on, and the care that socket files need.
#pragma once

#include <optional>
#include <stdexcept>
#include <string>
#include <zmq.hpp>

namespace lastscan::service {

// An endpoint cannot be listened on. what() is one line: what, where, what to do.
class EndpointError : public std::runtime_error {
 public:
  using std::runtime_error::runtime_error;
};

// What speaks against `endpoint`, in a clause that follows its name; nothing if
// it may be listened on: "ipc:///absolute/path" or "tcp://127.0.0.1:PORT" or
// "tcp://[::1]:PORT". Looks at the text only. Other hosts must wait until the
// wire is encrypted.
std::optional<std::string> ComplaintAboutEndpoint(const std::string& endpoint);

// Binds `socket` to `endpoint`. For a socket file: makes its folder (owner
// only), replaces the file of a dead daemon, and lets owner and group connect,
// nobody else. Throws EndpointError, also if a living daemon listens there or a
// file of another kind is in the way.
// REQUIRES: no other thread makes files meanwhile (the process's umask changes).
void Bind(zmq::socket_t& socket, const std::string& endpoint);

// Removes the socket file of `endpoint`, if it has one.
// REQUIRES: this process is bound to it still, so that it cannot be another's.
void RemoveSocketFile(const std::string& endpoint);

}  // namespace lastscan::service
