// Reads the variables and pages of an NTUPLES record group.
#include "formats/jcamp/ntuples.h"

#include <cmath>

#include "formats/jcamp/label_value.h"

namespace lastscan::formats::jcamp {
namespace {

using Variables = std::vector<Variable>;

double ColumnNumber(const Record& record, const std::string& column) {
  const std::optional<double> number = ParseNumber(column);
  if (!number) {
    Fail(record.line, record.label + " should list numbers, but holds " + Shown(column) +
                          ": correct it or export the file again");
  }
  return *number;
}

std::size_t ColumnCount(const Record& record, const std::string& column) {
  const double number = ColumnNumber(record, column);
  if (number < 0 || number != std::floor(number) || number > 9007199254740992.0) {
    Fail(record.line, record.label + " should list counts, but holds " + Shown(column) +
                          ": correct it or export the file again");
  }
  return static_cast<std::size_t>(number);
}

// Takes the columns of `record` into `variables`, if it is one of the records
// that describe them; a column left blank is not stated. Before the symbols are
// known there is one variable a column.
void Describe(const Record& record, Variables& variables) {
  const std::string& label = record.label;
  if (label != "VARNAME" && label != "SYMBOL" && label != "VARTYPE" && label != "UNITS" &&
      label != "VARDIM" && label != "FIRST" && label != "LAST" && label != "FACTOR") {
    return;
  }
  const std::vector<std::string> columns = ColumnsOf(record);
  if (variables.size() < columns.size()) variables.resize(columns.size());
  for (std::size_t i = 0; i < columns.size(); ++i) {
    const std::string& column = columns[i];
    Variable& variable = variables[i];
    if (column.empty()) continue;
    if (label == "VARNAME") variable.name = Comparable(column);
    if (label == "SYMBOL") variable.symbol = Comparable(column);
    if (label == "VARTYPE") variable.type = Comparable(column);
    if (label == "UNITS") variable.unit = Comparable(column);
    if (label == "VARDIM") variable.points = ColumnCount(record, column);
    if (label == "FIRST") variable.first = ColumnNumber(record, column);
    if (label == "LAST") variable.last = ColumnNumber(record, column);
    if (label == "FACTOR") variable.factor = ColumnNumber(record, column);
  }
}

const Variable& Named(const Variables& variables, const std::string& symbol, const Record& table) {
  for (const Variable& variable : variables) {
    if (!symbol.empty() && variable.symbol == symbol) return variable;
  }
  Fail(table.line, "the table is of " + Shown(symbol) +
                       ", which ##SYMBOL= does not name: export the file again");
}

}  // namespace

TableHead ReadTableHead(const Record& record) {
  TableHead head;
  Lines lines(record.value, record.line);
  const bool any = lines.Next();
  const std::string text = any ? Comparable(Bare(lines.line())) : "";
  // (X++(Y..Y)), then perhaps a comma and the kind of plot.
  const std::size_t plus = text.find("++(");
  const std::size_t dots = text.find("..");
  const std::size_t close = text.find("))");
  if (text.substr(0, 1) == "(" && plus != text.npos && dots != text.npos && close != text.npos &&
      plus + 3 < dots && dots < close) {
    head.abscissa = text.substr(1, plus - 1);
    head.ordinate = text.substr(plus + 3, dots - plus - 3);
    if (text.substr(dots + 2, close - dots - 2) == head.ordinate) {
      head.table = lines.rest();
      head.table_line = record.line + 1;
      return head;
    }
  }
  Fail(record.line, "a table of the form " + Shown(text) +
                        ", where Lastscan reads evenly spaced points, (X++(Y..Y)): export the "
                        "file in that form");
}

bool HasSeveralAxes(const Block& block) {
  const Record* types = block.Find("VARTYPE");
  if (types == nullptr) return false;
  int axes = 0;
  for (const std::string& type : ColumnsOf(*types)) axes += Comparable(type) == "INDEPENDENT";
  return axes > 1;
}

std::vector<Page> ReadPages(const Block& block) {
  std::vector<Page> pages;
  Variables common;
  Variables of_page;
  std::optional<std::size_t> points_of_page;
  bool begun = false;    // NTUPLES seen
  bool in_page = false;  // what is described holds for one page only
  for (const Record& record : block.records) {
    if (record.label == "NTUPLES") begun = true;
    if (!begun) continue;
    if (record.label == "ENDNTUPLES" || record.label == "ENDTUPLES") break;
    if (record.label == "PAGE") {
      in_page = true;
      of_page = common;
      points_of_page.reset();
    } else if (record.label == "NPOINTS" && in_page) {
      points_of_page = CountOf(&record);
    } else if (record.label == "DATATABLE") {
      const Variables& variables = in_page ? of_page : common;
      const TableHead head = ReadTableHead(record);
      Page page;
      page.line = record.line;
      page.abscissa = Named(variables, head.abscissa, record);
      page.ordinate = Named(variables, head.ordinate, record);
      if (points_of_page) page.abscissa.points = page.ordinate.points = points_of_page;
      page.table = head.table;
      page.table_line = head.table_line;
      pages.push_back(std::move(page));
    } else {
      Describe(record, in_page ? of_page : common);
    }
  }
  return pages;
}

}  // namespace lastscan::formats::jcamp
