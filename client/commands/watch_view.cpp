// The screen of `lastscan watch`: see watch_view.h.
#include "commands/watch_view.h"

#include <algorithm>

#include "commands/command.h"
#include "commands/run_view.h"
#include "drawing/escape.h"
#include "drawing/progress_figure.h"
#include "engine/advice/cautions.h"

namespace lastscan::commands {
namespace {

constexpr int kFewestFigureRows = 10;
constexpr int kMostFigureRows = 18;
constexpr std::size_t kMostHistory = 2000;

int CountLines(const std::string& text) {
  return static_cast<int>(std::count(text.begin(), text.end(), '\n'));
}

// The first `most` lines of `text`.
std::string FirstLines(const std::string& text, int most) {
  std::size_t end = 0;
  for (int line = 0; line < most && end < text.size(); ++line) {
    end = std::min(text.find('\n', end), text.size() - 1) + 1;
  }
  return most <= 0 ? std::string() : text.substr(0, end);
}

}  // namespace

WatchView::WatchView(std::string only, std::string endpoint)
    : only_(std::move(only)), endpoint_(std::move(endpoint)) {}

bool WatchView::Take(const v1::Advice& advice) {
  if (!only_.empty() && advice.run() != only_) return false;
  const auto [found, is_new] = runs_.try_emplace(advice.run());
  if (is_new) order_.push_back(advice.run());
  std::vector<v1::Advice>& history = found->second.history;
  if (!history.empty()) {
    v1::Advice& latest = history.back();
    if (latest.scans_done() > advice.scans_done()) return false;
    if (latest.scans_done() == advice.scans_done()) {
      const bool same =
          latest.verdict() == advice.verdict() && latest.findings_size() == advice.findings_size();
      latest = advice;
      return !same;
    }
  }
  history.push_back(advice);
  if (history.size() > kMostHistory) history.erase(history.begin());
  return true;
}

void WatchView::TakeHistory(const std::string& run, const v1::Reply& reply) {
  Shown& shown = runs_[run];
  shown.complete = true;
  std::vector<v1::Advice> all = ViewOf(reply).history;
  const std::uint64_t last = all.empty() ? 0 : all.back().scans_done();
  for (v1::Advice& advice : shown.history) {
    if (advice.scans_done() > last) all.push_back(std::move(advice));
  }
  if (!all.empty()) shown.history = std::move(all);
}

std::string WatchView::WantsHistory() const {
  if (order_.empty()) return "";
  const std::string& run = order_[chosen_];
  return runs_.at(run).complete ? "" : run;
}

void WatchView::RequireRun() const {
  if (only_.empty() || runs_.contains(only_)) return;
  throw Failure("the daemon knows no run \"" + only_ + "\": see lastscan runs");
}

std::vector<v1::Advice> WatchView::Latest() const {
  std::vector<v1::Advice> latest;
  for (const std::string& run : order_) latest.push_back(runs_.at(run).history.back());
  return latest;
}

std::string WatchView::NameColumn(const v1::Advice& advice) const {
  if (!only_.empty()) return "";
  return drawing::ForTerminal(advice.instrument() + "/" + advice.run()) + "  ";
}

void WatchView::Select(int step) {
  if (order_.empty()) return;
  const auto last = static_cast<std::ptrdiff_t>(order_.size()) - 1;
  chosen_ = static_cast<std::size_t>(
      std::clamp<std::ptrdiff_t>(static_cast<std::ptrdiff_t>(chosen_) + step, 0, last));
}

std::string WatchView::Draw(int columns, int rows, drawing::Style style) const {
  style.width = columns;
  const auto line = [columns](const std::string& text) {
    return drawing::CutTo(drawing::ForTerminal(text), std::max(columns, 1)) + "\n";
  };
  std::string screen =
      line(away_ ? "lastscan: no answer from " + endpoint_ + ": waiting; what follows is old"
                 : "lastscan: live from " + endpoint_);
  const std::string foot = line(std::string(engine::CautionInShort())) +
                           line(order_.size() > 1 ? "up, down: choose a run   q: quit" : "q: quit");
  const int room = rows - CountLines(screen) - CountLines(foot);

  std::string body;
  if (order_.empty()) {
    body = line("No runs yet. Advice appears here with the first snapshot.");
  } else {
    if (order_.size() > 1) {
      // The list scrolls so that the chosen run stays in sight.
      const std::size_t most = std::max<std::size_t>(3, static_cast<std::size_t>(room) / 4);
      const std::size_t first = chosen_ < most ? 0 : chosen_ - most + 1;
      drawing::Style uncoloured = style;
      uncoloured.colour = false;  // colour codes cannot be cut
      for (std::size_t i = first; i < std::min(order_.size(), first + most); ++i) {
        const v1::Advice& advice = runs_.at(order_[i]).history.back();
        body += line((i == chosen_ ? "> " : "  ") + NameColumn(advice) +
                     drawing::AdviceLine(advice, uncoloured));
      }
      body += line("");
    }
    const std::vector<v1::Advice>& history = runs_.at(order_[chosen_]).history;
    const v1::Advice& latest = history.back();
    body += line(latest.instrument() + "/" + latest.run() + ", " + latest.sample());
    const std::string full = drawing::AdviceInFull(latest, style);
    const int left = room - CountLines(body);
    // The figure takes what the words can spare, or half of a small screen.
    const int figure_rows = std::min(kMostFigureRows, std::max(left - CountLines(full), left / 2));
    std::string figure;
    if (figure_rows >= kFewestFigureRows && history.size() > 1) {
      figure = drawing::DrawForTerminal({history, std::nullopt}, figure_rows, style);
    }
    body += FirstLines(full, left - CountLines(figure)) + figure;
  }
  body = FirstLines(body, room);
  // The foot stands at the bottom.
  body.append(static_cast<std::size_t>(std::max(0, room - CountLines(body))), '\n');
  return screen + body + foot;
}

}  // namespace lastscan::commands
