// One run as the daemon knows it: see run_view.h.
#include "commands/run_view.h"

#include <sstream>

#include "commands/time_option.h"
#include "drawing/escape.h"
#include "drawing/words.h"

namespace lastscan::commands {

RunView ViewOf(const v1::Reply& reply) {
  RunView view;
  view.history.assign(reply.runs().begin(), reply.runs().end());
  if (reply.has_advice() &&
      (view.history.empty() || view.history.back().scans_done() < reply.advice().scans_done())) {
    view.history.push_back(reply.advice());
  }
  if (reply.records_size() > 0) view.record = reply.records(0);
  return view;
}

v1::Request RunQuestion(const std::string& run) {
  constexpr std::uint32_t kMostLooks = 500;  // more than a figure has columns
  v1::Request request;
  request.mutable_show_run()->set_run(run);
  request.mutable_show_run()->set_history(kMostLooks);
  return request;
}

RunView AskForRun(Connection& connection, const std::string& run) {
  RunView view = ViewOf(AskOrFail(connection, RunQuestion(run)));
  if (view.history.empty()) {
    throw Failure("the daemon has no advice on \"" + run + "\": see lastscan runs");
  }
  return view;
}

std::string RecordInWords(const v1::RunRecord& record) {
  std::ostringstream text;
  text << "started " << LocalTime(record.started_at().seconds()) << ", "
       << (record.ended() ? "ended " : "latest snapshot ") << LocalTime(record.last_at().seconds())
       << ", " << record.snapshots() << (record.snapshots() == 1 ? " snapshot\n" : " snapshots\n");
  for (const v1::VerdictChange& change : record.verdicts()) {
    text << "  scan " << change.scans_done() << ", " << LocalTime(change.at().seconds()) << ": "
         << drawing::VerdictInWords(change.verdict()) << ". "
         << drawing::ForTerminal(change.because()) << '\n';
  }
  for (const v1::ForecastMark& mark : record.forecasts()) {
    const v1::Interval& end = mark.at_planned_end();
    text << "  at " << drawing::Brief(100 * mark.share_done()) << " % of the plan (scan "
         << mark.scans_done() << ") the forecast for its end was " << drawing::WithLimits(end)
         << '\n';
  }
  return text.str();
}

}  // namespace lastscan::commands
