// Writes a table of evenly spaced ordinates.
#include "formats/jcamp/ordinate_writer.h"

#include <charconv>
#include <ostream>
#include <string>
#include <string_view>

namespace lastscan::formats::jcamp {
namespace {

constexpr std::size_t kLineLength = 80;

std::string Abscissa(const PrintedAbscissa& abscissa, std::size_t point) {
  // The largest double takes 309 digits before the decimals.
  char buffer[352];
  const double x = abscissa.first + static_cast<double>(point) * abscissa.step;
  const auto result =
      std::to_chars(buffer, buffer + sizeof buffer, x, std::chars_format::fixed, abscissa.decimals);
  return std::string(buffer, result.ptr);
}

// `value` with its first digit replaced by a letter: one of `zero`, the nine of
// `positive` and the nine of `negative`.
std::string Lettered(std::int64_t value, char zero, std::string_view positive,
                     std::string_view negative) {
  if (value == 0) return std::string(1, zero);
  std::string digits = std::to_string(value < 0 ? -value : value);
  digits[0] = (value < 0 ? negative : positive)[static_cast<std::size_t>(digits[0] - '1')];
  return digits;
}

std::string Squeezed(std::int64_t value) { return Lettered(value, '@', "ABCDEFGHI", "abcdefghi"); }
std::string Difference(std::int64_t value) {
  return Lettered(value, '%', "JKLMNOPQR", "jklmnopqr");
}
std::string Duplicate(std::int64_t count) { return Lettered(count, ' ', "STUVWXYZs", ""); }

void WriteDifdup(std::ostream& out, const std::vector<std::int64_t>& ordinates,
                 const PrintedAbscissa& abscissa) {
  std::string line = Abscissa(abscissa, 0) + Squeezed(ordinates[0]);
  std::size_t point = 0;  // the last one written
  // A line without a difference asks for no check value in the next.
  bool bare = true;
  while (point + 1 < ordinates.size()) {
    const std::int64_t difference = ordinates[point + 1] - ordinates[point];
    std::size_t end = point + 1;  // the last point of this run of equal differences
    while (end + 1 < ordinates.size() && ordinates[end + 1] - ordinates[end] == difference) ++end;
    const std::size_t count = end - point;
    std::string run = Difference(difference);
    if (count > 1) run += Duplicate(static_cast<std::int64_t>(count));
    if (!bare && line.size() + run.size() > kLineLength) {
      out << line << '\n';
      line = Abscissa(abscissa, point) + Squeezed(ordinates[point]);
    }
    line += run;
    bare = false;
    point = end;
  }
  out << line << '\n';
  if (point > 0) out << Abscissa(abscissa, point) << Squeezed(ordinates[point]) << '\n';
}

void WriteAffn(std::ostream& out, const std::vector<std::int64_t>& ordinates,
               const PrintedAbscissa& abscissa) {
  std::string line;
  for (std::size_t point = 0; point < ordinates.size(); ++point) {
    const std::string number = ' ' + std::to_string(ordinates[point]);
    if (!line.empty() && line.size() + number.size() > kLineLength) {
      out << line << '\n';
      line.clear();
    }
    if (line.empty()) line = Abscissa(abscissa, point);
    line += number;
  }
  out << line << '\n';
}

}  // namespace

void WriteOrdinates(std::ostream& out, const std::vector<std::int64_t>& ordinates,
                    const PrintedAbscissa& abscissa, TableForm form) {
  if (form == TableForm::kDifdup) {
    WriteDifdup(out, ordinates, abscissa);
  } else {
    WriteAffn(out, ordinates, abscissa);
  }
}

}  // namespace lastscan::formats::jcamp
