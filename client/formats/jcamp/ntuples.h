// Reads the variables and pages of an NTUPLES record group: which quantities it
// holds, and one table of evenly spaced ordinates a page.
#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "formats/jcamp/labelled_records.h"

namespace lastscan::formats::jcamp {

// One column of the NTUPLES records. Texts are in comparable form.
struct Variable {
  std::string name;    // "FID/REAL" reads "FIDREAL"
  std::string symbol;  // "X", "R", "I"
  std::string type;    // "INDEPENDENT", "DEPENDENT", "PAGE"; empty: not stated
  std::string unit;    // "SECONDS", "HZ", "PPM"
  std::optional<std::size_t> points;
  std::optional<double> first;
  std::optional<double> last;
  double factor = 1;
};

// A page's table, with its variables as they hold for that page.
struct Page {
  std::size_t line = 0;  // of ##DATA TABLE=
  Variable abscissa;
  Variable ordinate;
  std::string_view table;      // its lines, without the one that tells its form
  std::size_t table_line = 0;  // of the first of them
};

// What the first line of a table's value tells: "(X++(R..R)), XYDATA" gives X and R.
struct TableHead {
  std::string abscissa;
  std::string ordinate;
  std::string_view table;
  std::size_t table_line = 0;
};

// Throws Unreadable for any form but evenly spaced ordinates, saying what is read.
TableHead ReadTableHead(const Record& record);

// True if the variables of `block` run along more than one axis.
bool HasSeveralAxes(const Block& block);

// The pages of `block` in order. REQUIRES: block.Find("NTUPLES") != nullptr.
// Throws Unreadable when a column is no number or a table names no variable.
std::vector<Page> ReadPages(const Block& block);

}  // namespace lastscan::formats::jcamp
