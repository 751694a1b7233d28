// Following folders: see follow.h.
//
// Notices of changes only wake the loop; what is there is always found by
// looking. So a notice that is lost, or a network folder that sends none, costs
// time and never a snapshot.
#include "commands/follow.h"

#include <poll.h>
#include <unistd.h>

#include <algorithm>
#include <array>
#include <chrono>
#include <csignal>
#include <filesystem>
#include <memory>
#include <set>

#include "commands/connection.h"
#include "commands/folder_notices.h"
#include "commands/follow_journal.h"
#include "commands/run_files.h"
#include "commands/signals.h"
#include "commands/terminal.h"

namespace lastscan::commands {
namespace {

namespace fs = std::filesystem;
using Clock = std::chrono::steady_clock;
using Seconds = std::chrono::duration<double>;

constexpr double kFirstRetrySeconds = 0.5;
constexpr double kLongestRetrySeconds = 30;

struct Watched {
  std::string folder;  // canonical
  std::unique_ptr<FollowJournal> journal;
  bool away = false;  // said that it cannot be read
};

// A file in a watched folder that has not been dealt with in its present state.
struct Candidate {
  Watched* watched = nullptr;
  std::string run;
  FileState state;
  Clock::time_point unchanged_since;
  enum { kNew, kUnreadable, kDealtWith } stage = kNew;
  std::string reason;  // why it cannot be read
};

class Follower {
 public:
  explicit Follower(const FollowOptions& options)
      : options_(options),
        signals_({SIGINT, SIGTERM, SIGHUP}),
        connection_(options.endpoint, signals_.descriptor()),
        printer_(options.json) {
    std::set<std::string> seen;
    for (const std::string& path : options.folders) {
      std::error_code error;
      const std::string folder = fs::canonical(path, error).string();
      if (error || !fs::is_directory(folder, error)) {
        throw Failure(path + ": --follow watches folders, and this is none");
      }
      if (!seen.insert(folder).second) continue;
      watched_.push_back(
          {folder, std::make_unique<FollowJournal>(StateFolder(), folder, connection_.endpoint()),
           false});
    }
  }

  int Run() {
    printer_.CautionsFirst();
    try {
      while (!signals_.Take()) {
        Look();
        SendReady();
        if (!Wait()) break;
      }
    } catch (const Interrupted&) {
      // Between a request and its reply: the snapshot will be sent again.
    }
    return kDone;
  }

 private:
  // Brings candidates_ up to what the folders hold now.
  void Look() {
    std::set<std::string> present;
    for (Watched& watched : watched_) {
      std::error_code error;
      LookInto(watched, watched.folder, present, error);
      if (error && !watched.away) {
        Complain(watched.folder + ": the folder cannot be read: " + error.message() +
                 ": waiting for it");
      }
      watched.away = static_cast<bool>(error);
      if (error) continue;
      if (options_.facts.run()) continue;
      for (fs::directory_iterator entries(watched.folder, error), end; !error && entries != end;
           entries.increment(error)) {
        std::error_code ignored;
        if (entries->is_directory(ignored) && MayHoldData(entries->path().filename().string())) {
          LookInto(watched, entries->path().string(), present, ignored);
        }
      }
    }
    std::erase_if(candidates_, [&](const auto& entry) { return !present.contains(entry.first); });
  }

  void LookInto(Watched& watched, const std::string& folder, std::set<std::string>& present,
                std::error_code& error) {
    notices_.Watch(folder);
    for (fs::directory_iterator entries(folder, error), end; !error && entries != end;
         entries.increment(error)) {
      std::error_code ignored;
      const std::string path = entries->path().string();
      if (!entries->is_regular_file(ignored) || !MayHoldData(entries->path().filename().string())) {
        continue;
      }
      present.insert(path);
      const FileState state = StateOf(path);
      Candidate& candidate = candidates_[path];
      if (candidate.watched != nullptr && candidate.state == state) continue;
      candidate = {&watched,        options_.facts.run().value_or(RunNameOf(folder)),
                   state,           Clock::now(),
                   Candidate::kNew, {}};
      if (watched.journal->HoldsUnchanged(candidate.run, path, state)) {
        candidate.stage = Candidate::kDealtWith;
      }
    }
  }

  static double Unchanged(const Candidate& candidate) {
    return Seconds(Clock::now() - candidate.unchanged_since).count();
  }

  // Sends every settled file, lowest number of scans first.
  void SendReady() {
    if (Clock::now() < retry_at_) return;
    std::vector<RunFile> ready;
    for (auto& [path, candidate] : candidates_) {
      if (candidate.stage == Candidate::kUnreadable &&
          Unchanged(candidate) >= options_.times.give_up_seconds) {
        Complain(candidate.reason);
        candidate.stage = Candidate::kDealtWith;
      }
      if (candidate.stage == Candidate::kNew &&
          Unchanged(candidate) >= options_.times.settle_seconds) {
        ready.push_back({path, candidate.run, {}});
      }
    }
    if (ready.empty() || !DaemonIsThere()) return;
    SampleBudget budget;
    std::erase_if(ready, [&](RunFile& file) {
      if (!Read(file)) return true;
      budget.Admit(file);
      return false;
    });
    SortByScans(ready);
    for (RunFile& file : ready) {
      if (!SendOne(file)) return;
    }
  }

  // Asked before files are read, so that a long absence costs no reading.
  bool DaemonIsThere() {
    v1::Request ping;
    ping.mutable_ping();
    try {
      connection_.Ask(ping);
    } catch (const NoAnswer& error) {
      RetryLater(error.what());
      return false;
    }
    if (said_away_) Complain("the daemon at " + connection_.endpoint() + " answers again");
    said_away_ = false;
    return true;
  }

  bool Read(RunFile& file) {
    Candidate& candidate = candidates_[file.path];
    try {
      file.recording = ReadRunFile(file.path, file.run, options_.goal, options_.facts);
    } catch (const formats::Unreadable& error) {
      candidate.stage = Candidate::kUnreadable;
      candidate.reason = error.what();
      return false;
    }
    v1::Snapshot& snapshot = file.recording.snapshot;
    // It was exported when it was last changed, give or take the writing.
    if (!snapshot.has_recorded_at()) *snapshot.mutable_recorded_at() = ChangedAt(candidate.state);
    return true;
  }

  // False: the daemon is away or in trouble, and the rest must wait.
  bool SendOne(RunFile& file) {
    Candidate& candidate = candidates_[file.path];
    const std::uint64_t fingerprint = Fingerprint(file.run, file.path);
    // Changed while it was being read: it is looked at again when it has settled.
    if (StateOf(file.path) != candidate.state) return true;
    if (candidate.watched->journal->Holds(fingerprint)) {
      candidate.stage = Candidate::kDealtWith;
      return true;
    }
    v1::Reply reply;
    try {
      EnsureSamples(file, options_.goal, options_.facts);
      reply = Send(connection_, file.recording);
      std::vector<double>().swap(file.recording.samples);
    } catch (const NoAnswer& error) {
      RetryLater(error.what());
      return false;
    } catch (const formats::Unreadable&) {
      return true;  // rewritten since; the next look sees the change
    }
    if (reply.outcome() == v1::FAILED) {
      RetryLater(reply.reason());
      return false;
    }
    retry_seconds_ = kFirstRetrySeconds;
    candidate.stage = Candidate::kDealtWith;
    if (reply.outcome() != v1::ACCEPTED && reply.outcome() != v1::REPEATED) {
      Complain(file.path + ": " + reply.reason());
      return true;
    }
    printer_.Print(reply.advice());
    try {
      candidate.watched->journal->Add(file.run, file.path, candidate.state, fingerprint);
    } catch (const Failure& error) {
      if (!said_journal_) Complain(error.what());
      said_journal_ = true;
    }
    return true;
  }

  void RetryLater(const std::string& reason) {
    if (!said_away_) Complain(reason + " (trying again until it does)");
    said_away_ = true;
    retry_at_ = Clock::now() + std::chrono::duration_cast<Clock::duration>(Seconds(retry_seconds_));
    retry_seconds_ = std::min(2 * retry_seconds_, kLongestRetrySeconds);
  }

  // Waits for a change, for a file to settle or for the next full look. False:
  // a signal asks to stop.
  bool Wait() {
    double wait = options_.times.rescan_seconds;
    for (const auto& [path, candidate] : candidates_) {
      if (candidate.stage == Candidate::kDealtWith) continue;
      const double due = candidate.stage == Candidate::kNew ? options_.times.settle_seconds
                                                            : options_.times.give_up_seconds;
      wait = std::min(wait, due - Unchanged(candidate));
    }
    wait = std::max({wait, Seconds(retry_at_ - Clock::now()).count(), 0.01});
    const auto end = Clock::now() + std::chrono::duration_cast<Clock::duration>(Seconds(wait));
    for (;;) {
      std::array<pollfd, 2> items = {pollfd{signals_.descriptor(), POLLIN, 0},
                                     pollfd{notices_.descriptor(), POLLIN, 0}};
      const auto left =
          std::chrono::duration_cast<std::chrono::milliseconds>(end - Clock::now()).count();
      poll(items.data(), items.size(), static_cast<int>(std::max<std::int64_t>(0, left)) + 1);
      if (items[0].revents != 0) return false;
      if (items[1].revents != 0 && notices_.Drain()) return true;
      if (Clock::now() >= end) return true;
    }
  }

  const FollowOptions& options_;
  Signals signals_;
  Connection connection_;
  AdvicePrinter printer_;
  FolderNotices notices_;
  std::vector<Watched> watched_;
  std::map<std::string, Candidate> candidates_;  // by path
  bool said_away_ = false;
  bool said_journal_ = false;
  double retry_seconds_ = kFirstRetrySeconds;
  Clock::time_point retry_at_ = Clock::now();
};

}  // namespace

int FollowFolders(const FollowOptions& options) { return Follower(options).Run(); }

}  // namespace lastscan::commands
