// The live web page: all runs at a glance, one run in depth with its figure.
// It only reads; nothing that a browser sends changes a run. It listens on a
// loopback address only: whoever wants it elsewhere puts the lab's own proxy,
// with its own log-in, in front of it.
#pragma once

#include <functional>
#include <string>
#include <vector>

#include "lastscan/v1/advice.pb.h"

namespace lastscan::page {

struct PageOptions {
  std::string host = "127.0.0.1";  // a loopback address or "localhost"
  int port = 8732;                 // 0: any free port, printed at the start
  std::string daemon_endpoint;     // where read_runs asks; only ever shown

  // The latest advice of each run. Called about once in `seconds_between_reads`
  // from one thread of its own; may take seconds; throws std::exception when
  // the daemon does not answer (the page then says so and shows what it had).
  std::function<std::vector<v1::Advice>()> read_runs;
  double seconds_between_reads = 1.0;

  // The earlier advice of one run in order of scans, for its figure. Optional:
  // without it a figure begins with what the page itself has seen. Called from
  // the same thread as read_runs, once a run.
  std::function<std::vector<v1::Advice>(const std::string& run)> read_history;
};

// Serves until SIGINT or SIGTERM; prints the address on standard output once it
// answers. Returns 0 after a clean stop, 1 when it cannot listen (one line on
// standard error says why and what to do).
// REQUIRES: read_runs is set; no other thread runs that should get SIGINT or
// SIGTERM meanwhile: Serve blocks both and takes them itself.
int Serve(const PageOptions& options);

}  // namespace lastscan::page
