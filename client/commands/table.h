// Tables of text: aligned columns for people, CSV for programs.
#pragma once

#include <string>
#include <vector>

namespace lastscan::commands {

using Row = std::vector<std::string>;

// The columns of `rows` aligned, the first row underlined, ended by a line feed.
// Cells are made safe for a terminal. Columns in `right` are set to the right.
// REQUIRES: all rows have as many cells as the first.
std::string AsTable(const std::vector<Row>& rows, const std::vector<bool>& right);

// One CSV line (RFC 4180, line feed alone). A cell that a spreadsheet would take
// for a formula gets an apostrophe in front.
std::string AsCsvLine(const Row& row);

// The shortest text that reads back as `value`.
std::string ExactNumber(double value);

}  // namespace lastscan::commands
