// The two pages: all runs, and one.
#include "page/markup.h"

#include <algorithm>
#include <cmath>
#include <map>

#include "drawing/advice_text.h"
#include "drawing/escape.h"
#include "drawing/progress_figure.h"
#include "drawing/words.h"
#include "page/markup_parts.h"

namespace lastscan::page {
namespace {

using drawing::ForMarkup;

constexpr std::time_t kLately = 12 * 3600;

std::string Goal(const v1::Advice& advice, bool with_convention) {
  if (!(advice.goal().target() > 0)) {
    return {};
  }
  std::string text = drawing::Brief(advice.goal().target());
  if (with_convention) {
    text += ", " + std::string(drawing::ConventionInWords(advice.goal().convention()));
  }
  return text;
}

std::string GoalMet(const v1::Advice& advice) {
  return advice.verdict() == v1::ENOUGH
             ? std::string()
             : drawing::ClockTimes(advice.finish_at(), advice.issued_at());
}

std::string Saved(const v1::Advice& advice) {
  if (advice.scans_saved() == 0) {
    return {};
  }
  std::string text = std::to_string(advice.scans_saved()) + " scans";
  if (advice.seconds_saved() > 0) {
    text += ", " + drawing::DurationInWords(advice.seconds_saved());
  }
  return text;
}

std::string Where(const v1::Advice& advice) {
  std::string text = advice.instrument();
  for (const std::string& more : {advice.nucleus(), "run " + advice.run()}) {
    text += (text.empty() || more.empty() ? "" : ", ") + more;
  }
  return text;
}

std::string Card(const v1::Advice& advice) {
  return "<article id=\"run-" + drawing::ForAddress(advice.run()) + "\" class=\"run " +
         VerdictClass(advice.verdict()) + "\">\n<h2><a href=\"" + RunAddress(advice.run()) + "\">" +
         ForMarkup(NameOf(advice)) + "</a></h2>\n<p class=\"where\">" + ForMarkup(Where(advice)) +
         "</p>\n" + VerdictMarkup(advice) + "<dl>\n" +
         Fact("Signal-to-noise", drawing::ReadingInWords(advice)) +
         Fact("Goal", Goal(advice, false)) + Fact("Goal met about", GoalMet(advice)) +
         Fact("Saved", Saved(advice)) + "</dl>\n" + ProgressMarkup(advice) +
         FindingsMarkup(advice) + "</article>\n";
}

std::string Summary(const std::vector<v1::Advice>& runs) {
  if (runs.empty()) {
    return "No run yet.";
  }
  std::map<int, std::pair<std::string, int>> counts;
  for (const v1::Advice& advice : runs) {
    auto& [words, count] = counts[drawing::Urgency(advice.verdict())];
    words = drawing::VerdictInWords(advice.verdict());
    ++count;
  }
  std::string text =
      std::to_string(runs.size()) + (runs.size() == 1 ? " current run: " : " current runs: ");
  bool first = true;
  for (const auto& [urgency, counted] : counts) {
    text += (first ? "" : ", ") + std::to_string(counted.second) + " " + counted.first;
    first = false;
  }
  return text + ".";
}

std::string LinesTable(const v1::Advice& advice) {
  if (advice.lines().empty()) {
    return {};
  }
  std::string rows;
  for (const v1::Line& line : advice.lines()) {
    const std::string reading =
        line.confirmed() ? drawing::WithLimits(line.signal_to_noise())
                         : "below " + drawing::Number(line.signal_to_noise().upper()) + " so far";
    rows += "<tr><th scope=\"row\">" + ForMarkup(drawing::Shift(line.shift_ppm())) + "</th><td>" +
            ForMarkup(drawing::Number(line.width_hz())) + " Hz</td><td>" + ForMarkup(reading) +
            "</td><td>" + (line.window() >= 0 ? std::to_string(line.window() + 1) : "none") +
            "</td></tr>\n";
  }
  return "<section id=\"lines\" class=\"table\">\n<h2>Lines</h2>\n<table>\n<thead><tr>"
         "<th scope=\"col\">Shift</th><th scope=\"col\">Width</th>"
         "<th scope=\"col\">Signal-to-noise, 95 % limits</th><th scope=\"col\">Window</th></tr>"
         "</thead>\n<tbody>\n" +
         rows + "</tbody>\n</table>\n</section>\n";
}

std::string Facts(const v1::Advice& advice) {
  const bool enough = advice.verdict() == v1::ENOUGH;
  const bool confirmed = advice.limiting_line().confirmed();
  const double needed = advice.scans_needed().estimate();
  std::string chance;
  if (!enough) {
    chance = drawing::Chance(advice.chance_by_booking_end());
  }
  std::string line;
  if (confirmed) {
    line = drawing::Shift(advice.limiting_line().shift_ppm()) + ", " +
           drawing::Number(advice.limiting_line().width_hz()) + " Hz wide";
  }
  const bool ahead = confirmed && advice.scans_planned() > advice.scans_done() &&
                     advice.at_planned_end().estimate() > 0;
  return "<section id=\"facts\">\n<h2>In numbers</h2>\n<dl>\n" +
         Fact("Signal-to-noise", drawing::ReadingInWords(advice)) +
         Fact("Goal", Goal(advice, true)) +
         Fact("Scans needed", !enough && std::isfinite(needed) && needed > 0
                                  ? drawing::ScansWithLimits(advice.scans_needed())
                                  : "") +
         Fact("Goal met about", GoalMet(advice)) + Fact("Chance in the time there is", chance) +
         Fact("At the planned end", ahead ? drawing::WithLimits(advice.at_planned_end()) : "") +
         Fact("Saved against the plan", Saved(advice)) + Fact("Limiting line", line) +
         Fact("Time per scan", advice.seconds_per_scan() > 0
                                   ? drawing::Number(advice.seconds_per_scan()) + " s"
                                   : "") +
         Fact("Last snapshot", drawing::ClockTime(advice.issued_at(), {})) + "</dl>\n</section>\n";
}

}  // namespace

std::string RunsPage(const Shelf& shelf, const std::string& daemon_endpoint, std::time_t now) {
  std::vector<v1::Advice> current;
  std::vector<v1::Advice> earlier;
  for (const v1::Advice& advice : shelf.runs) {
    (advice.issued_at().seconds() >= now - kLately ? current : earlier).push_back(advice);
  }
  std::string main;
  if (shelf.runs.empty()) {
    main = std::string("<p id=\"empty\">") +
           (shelf.read_once ? "No run yet. Hand one over with <code>lastscan feed</code>."
                            : "Waiting for the daemon.") +
           "</p>\n";
  }
  for (const v1::Advice& advice : current) {
    main += Card(advice);
  }
  if (!earlier.empty()) {
    main += "<h2 id=\"earlier\">Earlier runs</h2>\n";
  }
  for (const v1::Advice& advice : earlier) {
    main += Card(advice);
  }
  return Frame("Lastscan", shelf, Summary(current), main, daemon_endpoint, true);
}

std::string RunPage(const Shelf& shelf, const std::vector<v1::Advice>& history,
                    const std::string& daemon_endpoint) {
  const v1::Advice& advice = history.back();
  const std::string verdict(drawing::VerdictInWords(advice.verdict()));
  drawing::ProgressFigure figure{history, {}};
  const std::string main =
      "<section id=\"verdict\" class=\"run " + VerdictClass(advice.verdict()) + "\">\n<h1>" +
      ForMarkup(NameOf(advice)) + "</h1>\n<p class=\"where\">" + ForMarkup(Where(advice)) +
      "</p>\n" + VerdictMarkup(advice) + "<p>" + ForMarkup(advice.because()) + "</p>\n" +
      ProgressMarkup(advice) + FindingsMarkup(advice) +
      "</section>\n<section id=\"figure\">\n<h2>Progress</h2>\n<picture>"
      "<source media=\"(max-width: 40rem)\" srcset=\"" +
      FigureAddress(advice, "tall") + "\"><img src=\"" + FigureAddress(advice, "wide") +
      "\" alt=\"" + ForMarkup(drawing::DescribeInWords(figure)) +
      "\"></picture>\n<p class=\"key\">Discs: readings with their 95 % limits. Open triangles: "
      "nothing confirmed yet, only an upper limit. Straight line: the root-of-scans law, dotted "
      "where it is a forecast. Diamond: forecast at the planned end.</p>\n</section>\n" +
      Facts(advice) + LinesTable(advice);
  return Frame(
      NameOf(advice) + ": " + verdict, shelf,
      NameOf(advice) + ": " + verdict + " after " + std::to_string(advice.scans_done()) + " scans.",
      main, daemon_endpoint, false);
}

std::string TroublePage(const std::string& title, const std::string& what) {
  Shelf shelf;
  shelf.read_once = true;
  return Frame(title, shelf, title, "<p id=\"empty\">" + ForMarkup(what) + "</p>\n", "(not asked)",
               false);
}

}  // namespace lastscan::page
