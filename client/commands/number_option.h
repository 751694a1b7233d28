// Numbers and ranges as people write them on a command line, read strictly: the
// whole text, finite, inside its bounds. Every error is WrongUse and names the
// option, what it must be and what was given.
#pragma once

#include <cstdint>
#include <string>

#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::commands {

// Any finite number.
double ReadNumber(const std::string& option, const std::string& text);
// A finite number above 0.
double ReadPositive(const std::string& option, const std::string& text);
// A number above 0 and below 1.
double ReadShare(const std::string& option, const std::string& text);
// A whole number from 1 to `most`.
std::uint64_t ReadCount(const std::string& option, const std::string& text, std::uint64_t most);
// "LOW:HIGH" in ppm, LOW below HIGH; negative shifts are allowed.
v1::ShiftRange ReadRange(const std::string& option, const std::string& text);

}  // namespace lastscan::commands
