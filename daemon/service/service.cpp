// The daemon's loop: sockets, waiting and replies.
#include "service/service.h"

#include <spdlog/spdlog.h>

#include <algorithm>
#include <cmath>
#include <string>
#include <vector>

#include "service/endpoint.h"
#include "service/readiness.h"

namespace lastscan::service {
namespace {

// Frames of a request: identity, a delimiter from some senders, message, samples.
// One more is kept so that too many are seen as too many.
constexpr std::size_t kMostFrames = 5;
// Requests of one sender that wait; more stay with the sender.
constexpr int kMostWaiting = 16;
// Frames up to this many times the allowed size are received, so that they can
// be refused in words; beyond it the connection is cut.
constexpr std::int64_t kRefusableSizes = 4;
constexpr double kLongestWait = 60;
constexpr double kSecondsToFinish = 1;

std::vector<zmq::message_t> ReceiveFrames(zmq::socket_t& socket) {
  std::vector<zmq::message_t> frames;
  bool more = true;
  while (more) {
    zmq::message_t frame;
    if (!socket.recv(frame, frames.empty() ? zmq::recv_flags::dontwait : zmq::recv_flags::none)) {
      break;
    }
    more = frame.more();
    if (frames.size() < kMostFrames) frames.push_back(std::move(frame));
  }
  return frames;
}

std::string_view View(const zmq::message_t& frame) {
  return {static_cast<const char*>(frame.data()), frame.size()};
}

}  // namespace

Service::Service(const v1::Settings& settings, ledger::Ledger& book)
    : settings_(settings.service()),
      context_(1),
      requests_socket_(context_, zmq::socket_type::router),
      broadcast_socket_(context_, zmq::socket_type::pub),
      requests_(settings, book, clocks_, [this](const v1::Advice& advice) { Broadcast(advice); }) {
  for (zmq::socket_t* socket : {&requests_socket_, &broadcast_socket_}) {
    socket->set(zmq::sockopt::linger, 1000);
    socket->set(
        zmq::sockopt::maxmsgsize,
        kRefusableSizes * static_cast<std::int64_t>(settings.service().largest_message_bytes()));
  }
  requests_socket_.set(zmq::sockopt::rcvhwm, kMostWaiting);
  Bind(requests_socket_, settings.service().request_endpoint());
  Bind(broadcast_socket_, settings.service().broadcast_endpoint());
  if (requests_.resumed() > 0) spdlog::info("took up {} runs", requests_.resumed());
}

Service::~Service() {
  RemoveSocketFile(settings_.request_endpoint());
  RemoveSocketFile(settings_.broadcast_endpoint());
}

void Service::Broadcast(const v1::Advice& advice) {
  const std::string topic = advice.instrument() + "/" + advice.run();
  const std::string body = advice.SerializeAsString();
  // A subscriber that does not keep up loses broadcasts, never receipts.
  try {
    broadcast_socket_.send(zmq::buffer(topic),
                           zmq::send_flags::sndmore | zmq::send_flags::dontwait);
    broadcast_socket_.send(zmq::buffer(body), zmq::send_flags::dontwait);
  } catch (const zmq::error_t& error) {
    spdlog::error("an advice could not be broadcast: {}", error.what());
  }
}

bool Service::ServeOne() {
  std::vector<zmq::message_t> frames = ReceiveFrames(requests_socket_);
  if (frames.empty()) return false;
  if (frames.size() < 2) return true;  // nothing but an identity: nobody waits for an answer
  // Senders that use REQ put an empty frame before the message and expect it back.
  const bool delimited = frames.size() > 2 && frames[1].size() == 0;
  std::vector<std::string_view> request;
  for (std::size_t i = delimited ? 2 : 1; i < frames.size(); ++i) {
    request.push_back(View(frames[i]));
  }
  const std::string reply = requests_.Answer(request).SerializeAsString();
  try {
    const auto more = zmq::send_flags::sndmore | zmq::send_flags::dontwait;
    requests_socket_.send(frames[0], more);
    if (delimited) requests_socket_.send(zmq::message_t(), more);
    requests_socket_.send(zmq::buffer(reply), zmq::send_flags::dontwait);
  } catch (const zmq::error_t& error) {
    // The sender has gone; a snapshot it sends again is answered as repeated.
    spdlog::debug("a reply found nobody: {}", error.what());
  }
  return true;
}

void Service::ServeWaiting(double seconds) {
  const double until = clocks_.steady() + seconds;
  while (ServeOne() && clocks_.steady() < until) {
  }
}

int Service::MillisecondsToWait(double alive_due) const {
  double wait = std::min(kLongestWait, std::max(0.0, alive_due - clocks_.steady()));
  if (const auto silence = requests_.SecondsToSilence()) wait = std::min(wait, *silence);
  return static_cast<int>(std::ceil(wait * 1000));
}

void Service::Serve(int stop) {
  const std::optional<double> alive_every = AliveEvery();
  double alive_due = clocks_.steady() + alive_every.value_or(kLongestWait);
  while (true) {
    zmq::pollitem_t items[] = {{requests_socket_.handle(), 0, ZMQ_POLLIN, 0},
                               {nullptr, stop, ZMQ_POLLIN, 0}};
    try {
      zmq::poll(items, 2, std::chrono::milliseconds(MillisecondsToWait(alive_due)));
    } catch (const zmq::error_t& error) {
      if (error.num() != EINTR) throw;
      continue;
    }
    if ((items[1].revents & ZMQ_POLLIN) != 0) break;
    // Bounded, so that a busy sender cannot keep silence and watchdog waiting.
    ServeWaiting(kSecondsToFinish);
    requests_.CheckSilence();
    if (clocks_.steady() >= alive_due) {
      if (alive_every) TellAlive();
      alive_due = clocks_.steady() + alive_every.value_or(kLongestWait);
    }
  }
  ServeWaiting(kSecondsToFinish);
}

}  // namespace lastscan::service
