// Answers requests: everything the daemon does but sockets and waiting.
#include "service/requests.h"

#include <google/protobuf/util/time_util.h>
#include <spdlog/spdlog.h>

#include <algorithm>
#include <chrono>
#include <exception>

#include "engine/advice/cautions.h"
#include "engine/refusal.h"
#include "ledger/fingerprint.h"
#include "ledger/record.h"
#include "service/envelope.h"

namespace lastscan::service {
namespace {

using google::protobuf::util::TimeUtil;

constexpr double kDay = 86400;
// A run without a final snapshot counts as active this long after its latest
// one: a long weekend's pause must not hide it.
constexpr double kActiveFor = 7 * kDay;
// Data of a run that rested longer than this are dropped; its record stays.
constexpr double kStatesKeptFor = 30 * kDay;
constexpr double kTryAgainAfter = 30;
constexpr std::size_t kMostListed = 1000;
constexpr std::size_t kMostHistory = 1000;

double UnixSeconds(const google::protobuf::Timestamp& time) {
  return static_cast<double>(time.seconds()) + 1e-9 * time.nanos();
}

v1::Reply Refused(const std::string& reason) {
  v1::Reply reply;
  reply.set_outcome(v1::REFUSED);
  reply.set_reason(reason);
  return reply;
}

v1::Reply Failed(const std::string& reason) {
  v1::Reply reply;
  reply.set_outcome(v1::FAILED);
  reply.set_reason(reason);
  return reply;
}

v1::Reply Answered() {
  v1::Reply reply;
  reply.set_outcome(v1::ANSWERED);
  return reply;
}

// A run that is stopped on our advice, or has all its scans, owes no snapshot.
bool IsDone(const v1::Advice& advice) {
  return advice.verdict() == v1::ENOUGH ||
         (advice.scans_planned() > 0 && advice.scans_done() >= advice.scans_planned());
}

std::string InWords(double seconds) {
  if (seconds < 120) return fmt::format("{:.3g} s", seconds);
  if (seconds < 7200) return fmt::format("{:.0f} min", seconds / 60);
  return fmt::format("{:.1f} h", seconds / 3600);
}

}  // namespace

Clocks SystemClocks() {
  return {
      [] {
        return std::chrono::duration<double>(std::chrono::system_clock::now().time_since_epoch())
            .count();
      },
      [] {
        return std::chrono::duration<double>(std::chrono::steady_clock::now().time_since_epoch())
            .count();
      }};
}

Requests::Requests(const v1::Settings& settings, ledger::Ledger& book, Clocks clocks,
                   Broadcast broadcast)
    : settings_(settings.service()),
      book_(book),
      clocks_(std::move(clocks)),
      broadcast_(std::move(broadcast)),
      runs_(settings.engine(), book, settings_.most_active_runs()),
      silence_(settings_.silent_after_intervals()) {
  for (const ledger::OpenRun& run : book_.OpenRuns(clocks_.wall() - kActiveFor, kMostIntervals)) {
    ++resumed_;
    if (IsDone(run.advice)) continue;
    bool told = false;
    for (const v1::Finding& finding : run.advice.findings()) told |= finding.kind() == v1::SILENT;
    silence_.Resume(run.record.run(), run.intervals_s, UnixSeconds(run.record.last_at()),
                    clocks_.steady(), told);
  }
}

v1::Reply Requests::Answer(const std::vector<std::string_view>& frames) {
  v1::Reply reply;
  try {
    reply = Dispatch(frames);
  } catch (const engine::Refusal& refusal) {
    reply = Refused(refusal.what());
  } catch (const ledger::LedgerError& error) {
    reply = Failed(std::string(error.what()) + "; mend it and send again");
  } catch (const std::exception& error) {
    reply = Failed(std::string("the daemon met an error of its own (") + error.what() +
                   "); nothing was changed, send again");
  }
  if (reply.outcome() == v1::REFUSED) spdlog::warn("refused: {}", reply.reason());
  if (reply.outcome() == v1::FAILED) spdlog::error("failed: {}", reply.reason());
  reply.set_version(LASTSCAN_VERSION);
  reply.set_broadcast_endpoint(settings_.broadcast_endpoint());
  return reply;
}

v1::Reply Requests::Dispatch(const std::vector<std::string_view>& frames) {
  const v1::Request request = OpenEnvelope(frames, settings_);
  switch (request.what_case()) {
    case v1::Request::kSnapshot:
      return TakeSnapshot(request.snapshot(), frames[1]);
    case v1::Request::kListRuns:
      return List(request.list_runs());
    case v1::Request::kShowRun:
      return Show(request.show_run());
    case v1::Request::kReadLedger:
      return Read(request.read_ledger());
    case v1::Request::kPing:
      return Answered();
    case v1::Request::WHAT_NOT_SET:
      break;
  }
  return Refused("the request asks nothing this daemon knows: name one of its questions");
}

v1::Reply Requests::TakeSnapshot(const v1::Snapshot& sent, std::string_view samples) {
  CheckNames(sent);
  CheckSizes(sent, settings_);
  const std::string fingerprint = ledger::Fingerprint(sent, samples);
  if (const auto given = book_.AdviceGiven(sent.run(), sent.scans_done(), fingerprint)) {
    v1::Reply reply;
    reply.set_outcome(v1::REPEATED);
    *reply.mutable_advice() = *given;
    return reply;
  }
  if (sent.has_recorded_at()) return Commit(sent, samples, fingerprint);
  v1::Snapshot stamped = sent;
  *stamped.mutable_recorded_at() =
      TimeUtil::MicrosecondsToTimestamp(static_cast<std::int64_t>(clocks_.wall() * 1e6));
  return Commit(stamped, samples, fingerprint);
}

v1::Reply Requests::Commit(const v1::Snapshot& snapshot, std::string_view samples,
                           const std::string& fingerprint) {
  const std::string& name = snapshot.run();
  ActiveRun& active = runs_.Find(name);
  const v1::Advice* advice = nullptr;
  try {
    if (!active.record.run().empty() && active.record.sample() != snapshot.sample()) {
      throw engine::Refusal("run '" + name + "' on instrument '" + active.record.instrument() +
                            "' is of another sample: give this one a run name of its own");
    }
    advice = &active.run.Admit(snapshot, samples);
  } catch (const engine::Refusal&) {
    // Nothing has changed; but a run that never began needs no place in memory.
    if (active.record.snapshots() == 0) runs_.Drop(name);
    throw;
  } catch (...) {
    runs_.Drop(name);
    throw;
  }
  v1::Reply reply;
  try {
    const std::string state = active.run.Save();
    ledger::AddToRecord(snapshot, *advice, &active.record);
    book_.AddSnapshot({.record = &active.record,
                       .advice = advice,
                       .state = state,
                       .fingerprint = fingerprint,
                       .arrived_at = clocks_.wall()});
    reply.set_outcome(v1::ACCEPTED);
    *reply.mutable_advice() = *advice;
  } catch (...) {
    runs_.Drop(name);  // memory goes back to what was committed
    throw;
  }
  Watch(snapshot, reply.advice());
  Log(reply.advice());
  broadcast_(reply.advice());
  return reply;
}

void Requests::Watch(const v1::Snapshot& snapshot, const v1::Advice& advice) {
  if (snapshot.final() || IsDone(advice)) {
    silence_.Forget(snapshot.run());
  } else {
    silence_.Arrived(snapshot.run(), UnixSeconds(snapshot.recorded_at()), clocks_.steady());
  }
}

void Requests::Log(const v1::Advice& advice) const {
  // Numbers of the advice only: no samples and no sample's name.
  spdlog::info("{}/{}: scan {} of {}, {}, signal-to-noise {:.3g} ({:.3g} to {:.3g}) | {}",
               advice.instrument(), advice.run(), advice.scans_done(), advice.scans_planned(),
               v1::Verdict_Name(advice.verdict()), advice.signal_to_noise().estimate(),
               advice.signal_to_noise().lower(), advice.signal_to_noise().upper(),
               engine::CautionInShort());
}

v1::Reply Requests::List(const v1::ListRuns& question) const {
  v1::Reply reply = Answered();
  for (v1::Advice& advice :
       book_.LatestAdvices(question.active_only(), clocks_.wall() - kActiveFor, kMostListed)) {
    *reply.add_runs() = std::move(advice);
  }
  if (reply.runs_size() == static_cast<int>(kMostListed)) {
    reply.set_reason("the newest " + std::to_string(kMostListed) +
                     " runs; ask the ledger for the others");
  }
  return reply;
}

v1::Reply Requests::Show(const v1::ShowRun& question) const {
  const auto record = book_.Record(question.run());
  const auto advice = book_.LatestAdvice(question.run());
  if (!record || !advice) {
    return Refused("there is no run '" + Printable(question.run()) +
                   "': list the runs to see their names");
  }
  v1::Reply reply = Answered();
  *reply.mutable_advice() = *advice;
  *reply.add_records() = *record;
  const std::size_t most = std::min<std::size_t>(question.history(), kMostHistory);
  for (v1::Advice& past : book_.History(question.run(), most)) *reply.add_runs() = std::move(past);
  return reply;
}

v1::Reply Requests::Read(const v1::ReadLedger& question) const {
  v1::Reply reply = Answered();
  for (v1::RunRecord& record : book_.Records(question)) *reply.add_records() = std::move(record);
  return reply;
}

void Requests::CheckSilence() {
  const double now = clocks_.steady();
  for (const Silence& silence : silence_.Due(now)) {
    try {
      TellSilence(silence);
    } catch (const std::exception& error) {
      spdlog::error("run {} is silent, but this could not be noted, will try again: {}",
                    silence.run, error.what());
      silence_.Postpone(silence.run, now + kTryAgainAfter);
    }
  }
  if (now - states_dropped_at_ < kDay && states_dropped_at_ != 0) return;
  states_dropped_at_ = now;
  try {
    const int dropped = book_.DropStates(clocks_.wall() - kStatesKeptFor);
    if (dropped > 0) spdlog::info("dropped the data of {} runs that rested for 30 days", dropped);
  } catch (const ledger::LedgerError& error) {
    spdlog::error("{}", error.what());
  }
}

void Requests::TellSilence(const Silence& silence) {
  auto record = book_.Record(silence.run);
  auto advice = book_.LatestAdvice(silence.run);
  if (!record || !advice) return;
  v1::Finding* finding = advice->add_findings();
  finding->set_kind(v1::SILENT);
  finding->set_severity(v1::HIGH);
  finding->set_since_scan(advice->scans_done());
  finding->set_detail("no snapshot for " + InWords(silence.silent_s) + ", one came every " +
                      InWords(silence.expected_s) +
                      " before: see whether the spectrometer still scans and still exports");
  advice->set_verdict(v1::INSPECT);
  advice->set_because("The spectrometer is silent: " + finding->detail() + ".");
  ledger::AddVerdict(
      *advice, TimeUtil::MicrosecondsToTimestamp(static_cast<std::int64_t>(clocks_.wall() * 1e6)),
      &*record);
  book_.AddAdvice(*record, *advice);
  // The copy in memory lacks the verdict just recorded.
  runs_.Drop(silence.run);
  spdlog::warn("{}/{}: {} | {}", advice->instrument(), silence.run, advice->because(),
               engine::CautionInShort());
  broadcast_(*advice);
}

std::optional<double> Requests::SecondsToSilence() const {
  const auto due = silence_.NextDue();
  if (!due) return std::nullopt;
  return std::max(0.0, *due - clocks_.steady());
}

}  // namespace lastscan::service
