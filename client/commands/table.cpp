// Tables of text: see table.h.
#include "commands/table.h"

#include <algorithm>
#include <charconv>
#include <cstdlib>
#include <string_view>

#include "drawing/escape.h"

namespace lastscan::commands {
namespace {

bool IsNumber(const std::string& cell) {
  char* end = nullptr;
  std::strtod(cell.c_str(), &end);
  return !cell.empty() && *end == '\0';
}

}  // namespace

std::string AsTable(const std::vector<Row>& rows, const std::vector<bool>& right) {
  std::vector<Row> safe;
  std::vector<int> widths(rows.empty() ? 0 : rows.front().size(), 0);
  for (const Row& row : rows) {
    Row cells;
    for (std::size_t i = 0; i < row.size(); ++i) {
      cells.push_back(drawing::ForTerminal(row[i]));
      widths[i] = std::max(widths[i], drawing::Columns(cells.back()));
    }
    safe.push_back(std::move(cells));
  }
  std::string text;
  for (std::size_t r = 0; r < safe.size(); ++r) {
    std::string line;
    std::string rule;
    for (std::size_t i = 0; i < safe[r].size(); ++i) {
      const std::string gap(static_cast<std::size_t>(widths[i] - drawing::Columns(safe[r][i])),
                            ' ');
      const std::string between = i == 0 ? "" : "  ";
      line += between + (right[i] ? gap + safe[r][i] : safe[r][i] + gap);
      rule += between + std::string(static_cast<std::size_t>(widths[i]), '-');
    }
    line.resize(line.find_last_not_of(' ') + 1);
    text += line + '\n';
    if (r == 0) text += rule + '\n';
  }
  return text;
}

std::string AsCsvLine(const Row& row) {
  std::string line;
  for (const std::string& cell : row) {
    if (&cell != &row.front()) line += ',';
    std::string value = cell;
    if (!value.empty() && std::string_view("=+-@\t\r").find(value[0]) != std::string_view::npos &&
        !IsNumber(value)) {
      value.insert(0, 1, '\'');
    }
    if (value.find_first_of(",\"\r\n") == std::string::npos && value == cell) {
      line += value;
      continue;
    }
    line += '"';
    for (const char c : value) line += c == '"' ? std::string("\"\"") : std::string(1, c);
    line += '"';
  }
  return line + '\n';
}

std::string ExactNumber(double value) {
  char text[32];
  const auto [end, error] = std::to_chars(text, text + sizeof text, value);
  return std::string(text, error == std::errc() ? end : text);
}

}  // namespace lastscan::commands
