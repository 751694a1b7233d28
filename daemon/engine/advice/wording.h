// Numbers as an operator reads them, for `because` and the details of findings.
#pragma once

#include <string>

#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

std::string Rounded(double value);           // three significant digits: "12.3", "1840"
std::string Scans(double scans);             // "1,024"; "more than a million million"
std::string Percent(double share);           // "12 %"
std::string Duration(double seconds);        // "3 h 12 min", "40 s"
std::string ClockTime(double unix_seconds);  // "2027-01-31 07:30 UTC"
std::string Shift(double ppm);               // "128.37 ppm"
std::string ConventionInWords(v1::Convention convention);

}  // namespace lastscan::engine
