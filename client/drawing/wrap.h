// Words into lines of a terminal.
#pragma once

#include <string>
#include <string_view>

namespace lastscan::drawing {

// Words shown at least this wide, whatever a terminal says of itself.
inline constexpr int kLeastWidth = 20;

// `text` as lines of at most `width` columns, each ended by a line feed. The
// first line begins with `first`, the others with `rest` (a hanging indent).
// A word that is too long for a line is broken. Line feeds in `text` count as
// spaces. REQUIRES: text, first and rest came out of ForTerminal (colour codes
// in them would be counted); first and rest take at most width - 4 columns.
std::string Wrapped(std::string_view text, int width, std::string_view first,
                    std::string_view rest);

}  // namespace lastscan::drawing
