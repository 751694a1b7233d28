// Endpoints: which ones the daemon may listen on, and the care that socket files need.
#include "service/endpoint.h"

#include <sys/socket.h>
#include <sys/stat.h>
#include <sys/un.h>
#include <unistd.h>

#include <cerrno>
#include <charconv>
#include <cstring>
#include <filesystem>
#include <string_view>

namespace lastscan::service {
namespace {

constexpr std::string_view kIpc = "ipc://";
constexpr std::string_view kTcp = "tcp://";
constexpr std::size_t kLongestPath = sizeof(sockaddr_un::sun_path) - 1;

std::optional<std::string> ComplaintAboutPath(std::string_view path) {
  if (path.empty() || path.front() != '/') {
    return "has no absolute path: write ipc:///folder/name.sock";
  }
  if (path.size() > kLongestPath) {
    return "has a path of " + std::to_string(path.size()) + " bytes, a socket's path may have " +
           std::to_string(kLongestPath) + ": choose a shorter one";
  }
  return std::nullopt;
}

std::optional<std::string> ComplaintAboutHost(std::string_view address) {
  const std::size_t colon = address.rfind(':');
  const std::string_view host = address.substr(0, colon);
  const std::string_view port =
      colon == std::string_view::npos ? std::string_view() : address.substr(colon + 1);
  int number = 0;
  const auto [end, error] = std::from_chars(port.data(), port.data() + port.size(), number);
  if (error != std::errc() || end != port.data() + port.size() || number < 1 || number > 65535) {
    return "has no port from 1 to 65535: write tcp://127.0.0.1:PORT";
  }
  if (host == "127.0.0.1" || host == "[::1]") return std::nullopt;
  return "is not on this computer alone: connections are not encrypted yet, so only "
         "tcp://127.0.0.1:PORT, tcp://[::1]:PORT or ipc:///path may be used";
}

// Does a process listen on the socket file at `path`?
enum class Listener { kNone, kDead, kAlive, kUnknown };

Listener FindListener(const std::string& path) {
  sockaddr_un address{};
  address.sun_family = AF_UNIX;
  std::memcpy(address.sun_path, path.data(), path.size());
  const int descriptor = ::socket(AF_UNIX, SOCK_STREAM | SOCK_CLOEXEC | SOCK_NONBLOCK, 0);
  if (descriptor < 0) return Listener::kUnknown;
  const int result =
      ::connect(descriptor, reinterpret_cast<const sockaddr*>(&address), sizeof(address));
  const int error = errno;
  ::close(descriptor);
  if (result == 0 || error == EAGAIN) return Listener::kAlive;
  if (error == ENOENT) return Listener::kNone;
  if (error == ECONNREFUSED) return Listener::kDead;
  return Listener::kUnknown;
}

void MakeWay(const std::string& endpoint) {
  const std::string path = endpoint.substr(kIpc.size());
  const std::filesystem::path folder = std::filesystem::path(path).parent_path();
  const mode_t mask = ::umask(077);
  std::error_code error;
  std::filesystem::create_directories(folder, error);
  ::umask(mask);
  if (error) {
    throw EndpointError(endpoint + ": folder " + folder.string() + " cannot be made: " +
                        error.message() + "; make it, or choose another endpoint in the settings");
  }
  if (::access(folder.c_str(), W_OK | X_OK) != 0) {
    throw EndpointError(endpoint + ": folder " + folder.string() +
                        " cannot be written: " + std::strerror(errno) +
                        "; mend its rights, or choose another endpoint in the settings");
  }
  const auto status = std::filesystem::symlink_status(path, error);
  if (!std::filesystem::exists(status)) return;
  if (!std::filesystem::is_socket(status)) {
    throw EndpointError(endpoint +
                        ": a file that is no socket is in the way; move it, or choose "
                        "another endpoint in the settings");
  }
  switch (FindListener(path)) {
    case Listener::kNone:
    case Listener::kDead:
      return;  // Bind replaces it
    case Listener::kAlive:
      throw EndpointError(endpoint +
                          ": another lastscand listens there; stop that one, or choose "
                          "another endpoint in the settings");
    case Listener::kUnknown:
      throw EndpointError(endpoint +
                          ": the socket there belongs to somebody else; remove it, or "
                          "choose another endpoint in the settings");
  }
}

}  // namespace

std::optional<std::string> ComplaintAboutEndpoint(const std::string& endpoint) {
  const std::string_view text(endpoint);
  for (const char c : text) {
    if (static_cast<unsigned char>(c) < ' ' || c == 0x7f) {
      return "has a control character: remove it";
    }
  }
  if (text.substr(0, kIpc.size()) == kIpc) return ComplaintAboutPath(text.substr(kIpc.size()));
  if (text.substr(0, kTcp.size()) == kTcp) return ComplaintAboutHost(text.substr(kTcp.size()));
  return "is neither ipc:///path nor tcp://127.0.0.1:PORT: write one of these";
}

void Bind(zmq::socket_t& socket, const std::string& endpoint) {
  if (const auto complaint = ComplaintAboutEndpoint(endpoint)) {
    throw EndpointError(endpoint + " " + *complaint);
  }
  const bool file = endpoint.compare(0, kIpc.size(), kIpc) == 0;
  if (file) MakeWay(endpoint);
  const mode_t mask = ::umask(0117);  // owner and group may connect
  try {
    socket.bind(endpoint);
    ::umask(mask);
  } catch (const zmq::error_t& error) {
    ::umask(mask);
    throw EndpointError(endpoint + " cannot be listened on: " + error.what() +
                        "; choose another endpoint in the settings");
  }
}

void RemoveSocketFile(const std::string& endpoint) {
  if (endpoint.compare(0, kIpc.size(), kIpc) == 0) ::unlink(endpoint.c_str() + kIpc.size());
}

}  // namespace lastscan::service
