// What `lastscan watch` shows: all runs at a glance, the chosen one in depth.
// Knows neither sockets nor terminals.
#pragma once

#include <map>
#include <string>
#include <vector>

#include "drawing/advice_text.h"
#include "lastscan/v1/advice.pb.h"
#include "lastscan/v1/service.pb.h"

namespace lastscan::commands {

class WatchView {
 public:
  // `only`: the one run to show; empty: all. `endpoint` is only ever shown.
  WatchView(std::string only, std::string endpoint);

  // Takes an advice; false when it is not wanted or not newer than what is
  // there. Advice that no snapshot led to (a silent run) is as new as its
  // verdict and findings are different.
  bool Take(const v1::Advice& advice);

  // Takes the earlier advice of `run` from the reply to a ShowRun request.
  void TakeHistory(const std::string& run, const v1::Reply& reply);
  // The run whose earlier advice is on screen and has not been asked for; empty: none.
  std::string WantsHistory() const;

  // Throws Failure if one run is wanted and nobody has heard of it.
  void RequireRun() const;

  // The latest advice of each run, in order of first sight.
  std::vector<v1::Advice> Latest() const;

  // The run's name as the first column of a line; empty when one run is wanted.
  std::string NameColumn(const v1::Advice& advice) const;

  // Chooses the run `step` below the chosen one.
  void Select(int step);

  // The whole screen, at most `rows` lines of at most `columns` columns.
  std::string Draw(int columns, int rows, drawing::Style style) const;

  bool away() const { return away_; }
  // Whether the daemon has stopped answering.
  void set_away(bool away) { away_ = away; }

 private:
  struct Shown {
    std::vector<v1::Advice> history;  // in order of scans
    bool complete = false;            // the daemon has been asked for all of it
  };

  std::string only_;
  std::string endpoint_;
  std::vector<std::string> order_;
  std::map<std::string, Shown> runs_;
  std::size_t chosen_ = 0;
  bool away_ = false;
};

}  // namespace lastscan::commands
