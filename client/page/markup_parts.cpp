// Frame, verdict, progress, findings and cautions in HTML.
#include "page/markup_parts.h"

#include <google/protobuf/util/time_util.h>

#include <algorithm>

#include "drawing/escape.h"
#include "drawing/words.h"
#include "engine/advice/cautions.h"

namespace lastscan::page {

using drawing::ForMarkup;

std::string RunAddress(const std::string& run) { return "/run?name=" + drawing::ForAddress(run); }

std::string FigureAddress(const v1::Advice& advice, std::string_view shape) {
  // The time and the scans make the address a new one for each new figure.
  return "/figure.svg?name=" + drawing::ForAddress(advice.run()) +
         "&amp;shape=" + std::string(shape) + "&amp;scans=" + std::to_string(advice.scans_done()) +
         "&amp;at=" + std::to_string(advice.issued_at().seconds());
}

std::string VerdictClass(v1::Verdict verdict) {
  std::string name = "verdict-" + std::string(drawing::VerdictInWords(verdict));
  std::replace(name.begin(), name.end(), ' ', '-');
  return name;
}

std::string VerdictMarkup(const v1::Advice& advice) {
  return "<p class=\"verdict\"><strong>" + std::string(drawing::VerdictInWords(advice.verdict())) +
         "</strong> <span>" + ForMarkup(drawing::WhatToDo(advice)) + "</span></p>\n";
}

std::string Fact(std::string_view label, std::string_view value) {
  if (value.empty()) {
    return {};
  }
  return "<div><dt>" + ForMarkup(label) + "</dt><dd>" + ForMarkup(value) + "</dd></div>\n";
}

std::string ProgressMarkup(const v1::Advice& advice) {
  const std::uint64_t total = std::max(
      {advice.scans_done(), advice.scans_planned(), advice.scans_advised(), std::uint64_t{1}});
  std::string words = std::to_string(advice.scans_done()) + " scans";
  if (advice.scans_planned() > 0) {
    words += " of " + std::to_string(advice.scans_planned()) + " planned";
  }
  if (advice.scans_advised() > 0 && advice.scans_advised() != advice.scans_planned()) {
    words += ", " + std::to_string(advice.scans_advised()) + " advised";
  }
  return "<p class=\"scans\"><progress max=\"" + std::to_string(total) + "\" value=\"" +
         std::to_string(advice.scans_done()) + "\" aria-label=\"scans done\">" + words +
         "</progress> " + words + "</p>\n";
}

std::string FindingsMarkup(const v1::Advice& advice) {
  if (advice.findings().empty()) {
    return {};
  }
  std::string text = "<ul class=\"findings\">\n";
  for (const v1::Finding& finding : advice.findings()) {
    text += "<li class=\"severity-" + std::to_string(finding.severity()) + "\"><strong>" +
            std::string(drawing::SeverityInWords(finding.severity())) +
            "</strong>: " + std::string(drawing::FindingInWords(finding.kind()));
    if (finding.since_scan() > 0) {
      text += ", since scan " + std::to_string(finding.since_scan());
    }
    text += (finding.detail().empty() ? "" : ": ") + ForMarkup(finding.detail()) + "</li>\n";
  }
  return text + "</ul>\n";
}

std::string NameOf(const v1::Advice& advice) {
  return advice.sample().empty() ? advice.run() : advice.sample();
}

std::string Frame(const std::string& title, const Shelf& shelf, const std::string& summary,
                  const std::string& main, const std::string& daemon_endpoint, bool at_home) {
  std::string state;
  if (!shelf.trouble.empty()) {
    state =
        "<p id=\"trouble\" role=\"alert\"><strong>No news.</strong> " + ForMarkup(shelf.trouble);
    if (shelf.answered_at != 0) {
      const auto then = google::protobuf::util::TimeUtil::TimeTToTimestamp(shelf.answered_at);
      state += " What you see is from " + drawing::ClockTime(then, then) + ".";
    }
    state += "</p>\n";
  }
  std::string cautions;
  for (std::string_view caution : engine::Cautions()) {
    cautions += "<li>" + ForMarkup(caution) + "</li>\n";
  }
  return "<!doctype html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n"
         "<meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n"
         "<meta name=\"color-scheme\" content=\"light dark\">\n<title>" +
         ForMarkup(title) +
         "</title>\n<link rel=\"stylesheet\" href=\"/page.css\">\n"
         "<link rel=\"icon\" type=\"image/svg+xml\" href=\"/icon.svg\">\n"
         "<script src=\"/page.js\" defer></script>\n"
         "<noscript><meta http-equiv=\"refresh\" content=\"15\"></noscript>\n</head>\n"
         "<body data-version=\"" +
         std::to_string(shelf.version) +
         "\">\n<a class=\"skip\" href=\"#live\">Skip to the advice</a>\n<header>\n" +
         (at_home ? "<h1>Lastscan</h1>\n"
                  : "<nav aria-label=\"Pages\"><a href=\"/\">All runs</a></nav>\n") +
         "<p id=\"summary\" role=\"status\">" + ForMarkup(summary) +
         "</p>\n</header>\n<main id=\"live\">\n" + state + main +
         "</main>\n<footer>\n<h2>Cautions</h2>\n<ul>\n" + cautions +
         "</ul>\n<p>Advice from the daemon at <code>" + ForMarkup(daemon_endpoint) +
         "</code>. This page only reads. Times are those of the computer that serves it.</p>\n"
         "</footer>\n</body>\n</html>\n";
}

}  // namespace lastscan::page
