// Keeps advice in order of scans and wakes those who wait for it.
#include "page/run_book.h"

#include <algorithm>
#include <tuple>

#include "drawing/words.h"

namespace lastscan::page {
namespace {

bool Same(const v1::Advice& a, const v1::Advice& b) {
  return a.SerializeAsString() == b.SerializeAsString();
}

}  // namespace

void RunBook::Append(Entry* entry, const v1::Advice& advice) {
  std::vector<v1::Advice>& history = entry->history;
  // An advice for the same number of scans (the spectrometer fell silent, or
  // the daemon knows more) takes the place of the one before.
  while (!history.empty() && history.back().scans_done() >= advice.scans_done()) {
    history.pop_back();
  }
  history.push_back(advice);
  if (history.size() > kMostPoints) {
    std::vector<v1::Advice> thinned;
    for (std::size_t i = 0; i < history.size(); ++i) {
      if (i % 2 == 0 || i + 1 == history.size()) {
        thinned.push_back(std::move(history[i]));
      }
    }
    history = std::move(thinned);
  }
}

void RunBook::Update(const std::vector<v1::Advice>& latest, std::time_t now) {
  const std::lock_guard lock(mutex_);
  bool news = !read_once_ || !trouble_.empty();
  std::set<std::string> named;
  for (const v1::Advice& advice : latest) {
    named.insert(advice.run());
    Entry& entry = entries_[advice.run()];
    if (!entry.history.empty() && Same(entry.latest, advice)) {
      continue;
    }
    entry.latest = advice;
    Append(&entry, advice);
    news = true;
  }
  news |=
      std::erase_if(entries_, [&](const auto& item) { return !named.contains(item.first); }) > 0;
  read_once_ = true;
  trouble_.clear();
  answered_at_ = now;
  if (news) {
    ++version_;
    changed_.notify_all();
  }
}

void RunBook::DaemonAway(const std::string& why) {
  const std::lock_guard lock(mutex_);
  for (const std::string& run : wanted_) {  // to be asked for again at the next look
    if (const auto found = entries_.find(run); found != entries_.end()) {
      found->second.asked = false;
    }
  }
  wanted_.clear();
  if (trouble_ != why) {
    trouble_ = why;
    ++version_;
    changed_.notify_all();
  }
}

std::vector<std::string> RunBook::HistoriesWanted() {
  const std::lock_guard lock(mutex_);
  return {wanted_.begin(), wanted_.end()};
}

void RunBook::PutHistory(const std::string& run, const std::vector<v1::Advice>& history) {
  const std::lock_guard lock(mutex_);
  wanted_.erase(run);
  const auto found = entries_.find(run);
  if (found == entries_.end()) {
    return;
  }
  Entry& entry = found->second;
  const std::vector<v1::Advice> seen = std::move(entry.history);
  entry.history.clear();
  for (const v1::Advice& advice : history) {
    if (seen.empty() || advice.scans_done() < seen.front().scans_done()) {
      Append(&entry, advice);
    }
  }
  for (const v1::Advice& advice : seen) {
    Append(&entry, advice);
  }
  entry.complete = true;
  ++version_;
  changed_.notify_all();
}

void RunBook::Rest(std::chrono::duration<double> time) {
  std::unique_lock lock(mutex_);
  changed_.wait_for(lock, time, [this] { return closed_ || !wanted_.empty(); });
}

Shelf RunBook::Look() const {
  const std::lock_guard lock(mutex_);
  Shelf shelf{version_, read_once_, trouble_, answered_at_, {}};
  for (const auto& [run, entry] : entries_) {
    shelf.runs.push_back(entry.latest);
  }
  std::stable_sort(shelf.runs.begin(), shelf.runs.end(),
                   [](const v1::Advice& a, const v1::Advice& b) {
                     const int first = drawing::Urgency(a.verdict());
                     const int second = drawing::Urgency(b.verdict());
                     return std::tuple(first, -a.issued_at().seconds()) <
                            std::tuple(second, -b.issued_at().seconds());
                   });
  return shelf;
}

std::vector<v1::Advice> RunBook::History(const std::string& run,
                                         std::chrono::milliseconds patience) {
  std::unique_lock lock(mutex_);
  const auto found = entries_.find(run);
  if (found == entries_.end()) {
    return {};
  }
  if (!found->second.asked) {
    found->second.asked = true;
    wanted_.insert(run);
    changed_.notify_all();
    changed_.wait_for(lock, patience, [&] {
      const auto now = entries_.find(run);
      return closed_ || now == entries_.end() || now->second.complete;
    });
  }
  const auto now = entries_.find(run);
  return now == entries_.end() ? std::vector<v1::Advice>{} : now->second.history;
}

std::optional<std::uint64_t> RunBook::AwaitChange(std::uint64_t seen,
                                                  std::chrono::milliseconds time) {
  std::unique_lock lock(mutex_);
  changed_.wait_for(lock, time, [&] { return closed_ || version_ != seen; });
  return closed_ ? std::nullopt : std::optional(version_);
}

void RunBook::Close() {
  const std::lock_guard lock(mutex_);
  closed_ = true;
  changed_.notify_all();
}

bool RunBook::closed() const {
  const std::lock_guard lock(mutex_);
  return closed_;
}

}  // namespace lastscan::page
