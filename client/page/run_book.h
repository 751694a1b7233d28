// What the page knows: the latest advice of every run, the history of those
// that somebody looks at, and whether the daemon still answers. One thread
// writes, any number read.
#pragma once

#include <chrono>
#include <condition_variable>
#include <cstdint>
#include <ctime>
#include <map>
#include <mutex>
#include <optional>
#include <set>
#include <string>
#include <vector>

#include "lastscan/v1/advice.pb.h"

namespace lastscan::page {

// A look at the book at one moment.
struct Shelf {
  std::uint64_t version = 0;     // differs whenever anything else here does
  bool read_once = false;        // the daemon has answered at least once
  std::string trouble;           // why the daemon does not answer; empty: it does
  std::time_t answered_at = 0;   // when it last did
  std::vector<v1::Advice> runs;  // most urgent first
};

class RunBook {
 public:
  // Most points a figure keeps. A longer history loses every second of its
  // older points, so that a run of any length costs the same.
  static constexpr std::size_t kMostPoints = 400;

  // -- the writing thread ---------------------------------------------------
  void Update(const std::vector<v1::Advice>& latest, std::time_t now);
  // Keeps what it has; histories not yet in are asked for again at their next look.
  void DaemonAway(const std::string& why);
  // Runs whose earlier advice somebody waits for.
  std::vector<std::string> HistoriesWanted();
  // Earlier advice of `run`; empty when there is none to be had.
  void PutHistory(const std::string& run, const std::vector<v1::Advice>& history);
  // Sleeps for `time`, until a history is wanted, or until Close.
  void Rest(std::chrono::duration<double> time);

  // -- readers --------------------------------------------------------------
  Shelf Look() const;
  // History of `run` up to its latest advice; empty when there is no such run.
  // The first look at a run waits up to `patience` for its earlier advice.
  std::vector<v1::Advice> History(const std::string& run, std::chrono::milliseconds patience);
  // Waits until the version differs from `seen`, or `time` has passed, or Close.
  // Returns the version then; nothing after Close.
  std::optional<std::uint64_t> AwaitChange(std::uint64_t seen, std::chrono::milliseconds time);

  // Wakes everybody for good.
  void Close();
  bool closed() const;

 private:
  struct Entry {
    v1::Advice latest;
    std::vector<v1::Advice> history;
    bool asked = false;     // somebody looks at it
    bool complete = false;  // its earlier advice is in
  };
  void Append(Entry* entry, const v1::Advice& advice);

  mutable std::mutex mutex_;
  std::condition_variable changed_;  // version, histories, wishes or closed
  std::map<std::string, Entry> entries_;
  std::set<std::string> wanted_;
  // Begins at the clock, so that a browser sees a server that was started anew.
  std::uint64_t version_ = static_cast<std::uint64_t>(std::time(nullptr)) * 1000;
  bool read_once_ = false;
  std::string trouble_;
  std::time_t answered_at_ = 0;
  bool closed_ = false;
};

}  // namespace lastscan::page
