// Fuzzes the daemon's answers: any frames get one reply with a reason, nothing
// throws, and a refused request leaves no run behind. Input: one byte that says
// how many frames follow, then each frame with its length in two bytes; a third
// of the inputs has its first frame wrapped as a snapshot of the right size, so
// that the engine is reached too.
#include <google/protobuf/stubs/logging.h>
#include <spdlog/spdlog.h>

#include <algorithm>
#include <cstddef>
#include <cstdint>
#include <cstdlib>
#include <memory>
#include <string>
#include <string_view>
#include <vector>

#include "engine/run.h"
#include "lastscan/v1/service.pb.h"
#include "ledger/ledger.h"
#include "service/requests.h"

namespace {

using lastscan::v1::Reply;
using lastscan::v1::Request;

lastscan::v1::Settings Settings() {
  lastscan::v1::Settings settings;
  *settings.mutable_engine() = lastscan::engine::DefaultSettings();
  settings.mutable_service()->set_largest_message_bytes(1 << 20);
  settings.mutable_service()->set_most_points(256);
  settings.mutable_service()->set_most_active_runs(2);
  settings.mutable_service()->set_silent_after_intervals(3);
  return settings;
}

// The daemon's answers on a ledger in memory, made anew now and then so that it
// does not grow without end.
class Bench {
 public:
  lastscan::service::Requests& requests() {
    if (count_++ % 2000 == 0) {
      requests_.reset();
      book_ = std::make_unique<lastscan::ledger::Ledger>(":memory:");
      requests_ = std::make_unique<lastscan::service::Requests>(
          Settings(), *book_,
          lastscan::service::Clocks{[this] { return time_ += 1; }, [this] { return time_; }},
          [](const lastscan::v1::Advice&) {});
    }
    return *requests_;
  }
  const lastscan::ledger::Ledger& book() const { return *book_; }

 private:
  std::uint64_t count_ = 0;
  double time_ = 1e9;
  std::unique_ptr<lastscan::ledger::Ledger> book_;
  std::unique_ptr<lastscan::service::Requests> requests_;
};

void Require(bool condition) {
  if (!condition) std::abort();
}

// A snapshot that could be true in most ways, changed by whatever `patch` parses to.
std::string Wrapped(std::string_view patch, std::size_t& bytes) {
  Request request;
  lastscan::v1::Snapshot& snapshot = *request.mutable_snapshot();
  snapshot.set_run("a");
  snapshot.set_instrument("bench-1");
  snapshot.set_nucleus("13C");
  snapshot.set_observe_frequency_mhz(100);
  snapshot.set_spectral_width_hz(1000);
  snapshot.set_domain(lastscan::v1::FID);
  snapshot.set_encoding(lastscan::v1::FLOAT32);
  snapshot.set_points(64);
  snapshot.set_scans_done(8);
  snapshot.set_accumulation(lastscan::v1::SUM);
  lastscan::v1::Snapshot change;
  if (change.ParseFromArray(patch.data(), static_cast<int>(patch.size()))) {
    snapshot.MergeFrom(change);
  }
  // Thousands of looks cost seconds of stop boundary, once for each number of
  // them: honest, but no use of a fuzzer's time.
  snapshot.set_scans_done(snapshot.scans_done() % 1024);
  const bool real = snapshot.domain() == lastscan::v1::SPECTRUM;
  const bool wide = snapshot.encoding() == lastscan::v1::FLOAT64;
  bytes = std::size_t{snapshot.points() % 4096} * (real ? 1 : 2) * (wide ? 8 : 4);
  return request.SerializeAsString();
}

}  // namespace

extern "C" int LLVMFuzzerInitialize(int*, char***) {
  spdlog::set_level(spdlog::level::off);
  google::protobuf::SetLogHandler(nullptr);  // as the daemon does
  return 0;
}

extern "C" int LLVMFuzzerTestOneInput(const std::uint8_t* data, std::size_t size) {
  static Bench bench;
  std::string_view rest(reinterpret_cast<const char*>(data), size);
  if (rest.empty()) return 0;
  const auto shape = static_cast<unsigned char>(rest[0]);
  rest.remove_prefix(1);
  std::vector<std::string> frames;
  for (int i = 0; i < shape % 4 && rest.size() >= 2; ++i) {
    std::size_t length =
        static_cast<unsigned char>(rest[0]) << 8 | static_cast<unsigned char>(rest[1]);
    rest.remove_prefix(2);
    length = std::min(length, rest.size());
    frames.emplace_back(rest.substr(0, length));
    rest.remove_prefix(length);
  }
  if (shape % 3 == 0 && !frames.empty()) {
    std::size_t bytes = 0;
    frames[0] = Wrapped(std::string(frames[0]), bytes);
    frames.resize(2);
    // Repeats what was given up to the size that the header promises.
    const std::string pattern = frames[1].empty() ? std::string(1, '\0') : frames[1];
    while (frames[1].size() < bytes) frames[1] += pattern;
    frames[1].resize(bytes);
  }
  const std::vector<std::string_view> views(frames.begin(), frames.end());
  lastscan::service::Requests& requests = bench.requests();
  const Reply reply = requests.Answer(views);
  Require(reply.outcome() != lastscan::v1::OUTCOME_UNSPECIFIED);
  const bool failed =
      reply.outcome() == lastscan::v1::REFUSED || reply.outcome() == lastscan::v1::FAILED;
  Require(!failed || (!reply.reason().empty() && reply.reason().find('\n') == std::string::npos));
  // The daemon's own fault is never what a sender can bring about.
  Require(reply.outcome() != lastscan::v1::FAILED);
  // Every reply must reach its reader.
  Reply again;
  Require(again.ParseFromString(reply.SerializeAsString()));
  if (reply.outcome() == lastscan::v1::ACCEPTED) {
    Require(requests.Answer(views).outcome() == lastscan::v1::REPEATED);
    Require(bench.book().LatestAdvice(reply.advice().run()).has_value());
  }
  requests.CheckSilence();
  return 0;
}
