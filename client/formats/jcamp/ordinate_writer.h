// Writes a table of evenly spaced ordinates, (X++(Y..Y)), in lines of at most 80
// characters, each with its abscissa.
#pragma once

#include <cstdint>
#include <iosfwd>
#include <vector>

#include "formats/jcamp_dx.h"

namespace lastscan::formats::jcamp {

// The abscissae as they are printed: first + point * step, with that many decimals.
struct PrintedAbscissa {
  double first = 0;
  double step = 1;
  int decimals = 0;
};

// kAffn: blanks between the numbers. kDifdup: each line one squeezed ordinate, then
// differences and duplicate counts; every line but the first begins with the check
// value, and the last line is a check alone.
// REQUIRES: ordinates below 2^53 in size.
void WriteOrdinates(std::ostream& out, const std::vector<std::int64_t>& ordinates,
                    const PrintedAbscissa& abscissa, TableForm form);

}  // namespace lastscan::formats::jcamp
