// What must be true of a request before anything is done with it.
#include "service/envelope.h"

#include <google/protobuf/util/time_util.h>

#include <algorithm>

#include "engine/refusal.h"

namespace lastscan::service {
namespace {

using engine::Refusal;
using google::protobuf::util::TimeUtil;

constexpr std::size_t kLongestName = 200;
// Beyond this a double no longer counts scans exactly.
constexpr std::uint64_t kMostScans = std::uint64_t{1} << 53;

bool IsControl(char c) { return static_cast<unsigned char>(c) < ' ' || c == 0x7f; }

void CheckName(std::string_view what, const std::string& name) {
  if (name.size() > kLongestName) {
    throw Refusal("the name of the " + std::string(what) + " has " + std::to_string(name.size()) +
                  " bytes: send at most " + std::to_string(kLongestName));
  }
  for (const char c : name) {
    if (IsControl(c)) {
      throw Refusal("the name of the " + std::string(what) + " '" + Printable(name) +
                    "' has a control character: remove it");
    }
  }
}

void CheckTime(const char* what, const google::protobuf::Timestamp& time, const std::string& run) {
  // 1970 to 9999: what the ledger and a timestamp's text can hold.
  if (time.seconds() < 0 || time.seconds() > TimeUtil::kTimestampMaxSeconds || time.nanos() < 0 ||
      time.nanos() > 999'999'999) {
    throw Refusal(std::string(what) + " of run '" + run +
                  "' is no time from 1970 to 9999: send seconds since 1970");
  }
}

}  // namespace

v1::Request OpenEnvelope(const std::vector<std::string_view>& frames,
                         const v1::ServiceSettings& settings) {
  std::size_t bytes = 0;
  for (std::string_view frame : frames) bytes += frame.size();
  if (bytes > settings.largest_message_bytes()) {
    throw Refusal("the request has " + std::to_string(bytes) + " bytes, allowed are " +
                  std::to_string(settings.largest_message_bytes()) +
                  ": send fewer points, or raise largest_message_bytes in the settings");
  }
  v1::Request request;
  if (frames.empty() || frames[0].empty() ||
      !request.ParseFromArray(frames[0].data(), static_cast<int>(frames[0].size()))) {
    throw Refusal("the first frame is not a lastscan.v1.Request: see proto/lastscan/v1");
  }
  const std::size_t expected = request.has_snapshot() ? 2 : 1;
  if (frames.size() != expected) {
    throw Refusal("the request has " + std::to_string(frames.size()) + " frames instead of " +
                  std::to_string(expected) +
                  ": send the message, and behind a snapshot its samples in one frame");
  }
  return request;
}

void CheckNames(const v1::Snapshot& snapshot) {
  if (snapshot.run().empty()) throw Refusal("the snapshot names no run: give the run a name");
  CheckName("run", snapshot.run());
  CheckName("instrument", snapshot.instrument());
  CheckName("sample", snapshot.sample());
  CheckName("nucleus", snapshot.nucleus());
  CheckName("probe", snapshot.facts().probe());
  if (snapshot.instrument().empty()) {
    throw Refusal("the snapshot of run '" + snapshot.run() +
                  "' names no instrument: say which spectrometer it is of");
  }
}

void CheckSizes(const v1::Snapshot& snapshot, const v1::ServiceSettings& settings) {
  if (snapshot.points() > settings.most_points()) {
    throw Refusal(std::to_string(snapshot.points()) + " points of run '" + snapshot.run() +
                  "' are more than the " + std::to_string(settings.most_points()) +
                  " allowed: send fewer, or raise most_points in the settings");
  }
  if (snapshot.scans_done() > kMostScans || snapshot.scans_planned() > kMostScans) {
    throw Refusal("the number of scans of run '" + snapshot.run() +
                  "' cannot be true: send scans done and scans planned");
  }
  CheckTime("recorded_at", snapshot.recorded_at(), snapshot.run());
  CheckTime("booking_end", snapshot.booking_end(), snapshot.run());
}

std::string Printable(std::string_view name) {
  std::size_t length = std::min(name.size(), kLongestName);
  // Not through the middle of a character: a reply's text must stay UTF-8.
  while (length < name.size() && length > 0 && (name[length] & 0xc0) == 0x80) --length;
  std::string text(name.substr(0, length));
  for (char& c : text) {
    if (IsControl(c)) c = '?';
  }
  return text;
}

}  // namespace lastscan::service
