// Names of samples, runs and instruments come from outside and are hostile
// until proven otherwise: a name may hold terminal control sequences, markup,
// or characters that turn the direction of the text around.
#pragma once

#include <string>
#include <string_view>

namespace lastscan::drawing {

// `text` for a terminal: control characters (C0, DEL, C1), line and paragraph
// separators, characters that change the direction of the text or have no
// shape at all, and bytes that are not UTF-8 are replaced by U+FFFD. Everything
// else, accents and other scripts included, is left as it is.
std::string ForTerminal(std::string_view text);

// The same, and then safe as text and as a quoted attribute of XML and HTML.
std::string ForMarkup(std::string_view text);

// Percent-encoded for the query of an address.
std::string ForAddress(std::string_view text);

// Columns that `text` takes on a terminal.
// REQUIRES: text came out of ForTerminal.
int Columns(std::string_view text);

// `text` cut to at most `columns`, with an ellipsis where something was cut.
// REQUIRES: as Columns; columns >= 1.
std::string CutTo(std::string_view text, int columns);

}  // namespace lastscan::drawing
