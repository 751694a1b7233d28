// Pieces of HTML that both pages use.
#pragma once

#include <string>
#include <string_view>

#include "lastscan/v1/advice.pb.h"
#include "page/run_book.h"

namespace lastscan::page {

// Address of the page of `run`, with all characters in place for an attribute.
std::string RunAddress(const std::string& run);
std::string FigureAddress(const v1::Advice& advice, std::string_view shape);

// "verdict-on-course": a class of the style sheet.
std::string VerdictClass(v1::Verdict verdict);

// Verdict in capitals and what to do.
std::string VerdictMarkup(const v1::Advice& advice);

// One row of a description list; nothing when `value` is empty. `value` is text,
// not yet escaped.
std::string Fact(std::string_view label, std::string_view value);

// Share of the advised (or planned) scans done, as a bar with words.
std::string ProgressMarkup(const v1::Advice& advice);

std::string FindingsMarkup(const v1::Advice& advice);

// "resin B": the sample, or the run when the sample has no name. Not escaped.
std::string NameOf(const v1::Advice& advice);

// Everything around `main`: head, state of the daemon, cautions.
std::string Frame(const std::string& title, const Shelf& shelf, const std::string& summary,
                  const std::string& main, const std::string& daemon_endpoint, bool at_home);

}  // namespace lastscan::page
