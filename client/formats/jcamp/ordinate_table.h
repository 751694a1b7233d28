// Decodes a table of evenly spaced ordinates, (X++(Y..Y)), in all forms of the
// standard, which may follow one another in a line:
//   AFFN  free numbers, apart by blanks or commas, with exponents;
//   PAC   numbers packed by their signs;
//   SQZ   squeezed: the first digit is a letter that tells the sign too;
//   DIF   the difference to the point before, its first digit a letter;
//   DUP   how many times the last value (in DIF form: the last difference) stands.
// A line begins with its abscissa. After a line that ended in DIF form the first
// ordinate repeats the last point of that line: a check, not a new point.
#pragma once

#include <cstddef>
#include <string_view>
#include <vector>

namespace lastscan::formats::jcamp {

// The abscissa a table must follow. REQUIRES: points >= 2.
struct Abscissa {
  double first = 0;        // at the first point, in its unit
  double last = 0;         // at the last point
  double factor = 1;       // unit per unit of the abscissae printed in the table
  std::size_t points = 0;  // promised
  double spacing() const { return (last - first) / static_cast<double>(points - 1); }
};

// The ordinates as printed, not yet multiplied by their factor: exactly
// `abscissa.points` of them. `lines` is the table without the line that tells its
// form; `first_line` is the number of its first line.
//
// An abscissa may be off by one spacing plus the last digit printed, for writers
// round it. `E` and `e` are exponents in a table that holds no other letter; in
// any other they are digits unless a sign follows them in a free number.
//
// Throws Unreadable naming the line: a check value that differs, an abscissa out
// of place, more or fewer points than promised, an unknown ordinate (?), text
// that belongs to no form. Takes memory for points found, never for promised ones.
std::vector<double> DecodeOrdinates(std::string_view lines, std::size_t first_line,
                                    const Abscissa& abscissa);

}  // namespace lastscan::formats::jcamp
