// The safety cautions that every output of Lastscan carries. They live here and
// nowhere else: advice on the wire, terminal, reports, page, CSV, metrics, log
// and hooks all take them from these functions.
#pragma once

#include <span>
#include <string>
#include <string_view>

namespace lastscan::engine {

// The full cautions, one plain sentence or two each, most urgent first. The
// last one says that local rules and the responsible person decide.
std::span<const std::string_view> Cautions();

// One line for places where a whole list will not fit (a log line, a status
// line). It points to the full list.
std::string_view CautionInShort();

// The full cautions as comment lines, each behind `prefix` ("# " for CSV and
// metrics) and ended by a line feed.
std::string CautionsAsComments(std::string_view prefix);

}  // namespace lastscan::engine
