// Reads the value of a record: text, one number, or columns.
#pragma once

#include <cstddef>
#include <optional>
#include <string>
#include <string_view>
#include <vector>

#include "formats/jcamp/labelled_records.h"

namespace lastscan::formats::jcamp {

// The first line of the value, without comment, as UTF-8: text that is not UTF-8
// already is taken for Latin-1. Control characters become blanks. Empty when
// `record` is null.
std::string TextOf(const Record* record);

// A finite number that fills all of `text` ("+" allowed), else nothing.
std::optional<double> ParseNumber(std::string_view text);

// The number a record states; nothing when `record` is null or its value is empty.
// Throws Unreadable when the value is no finite number.
std::optional<double> NumberOf(const Record* record);

// As NumberOf, for counts: throws Unreadable unless the number is whole, not
// negative and below 2^53.
std::optional<std::size_t> CountOf(const Record* record);

// The comma-separated columns of the value, all its lines, comments left out,
// blanks trimmed. At most 64: more are no variables of an experiment.
std::vector<std::string> ColumnsOf(const Record& record);

// `text` in quotes, short and printable enough for a message.
std::string Shown(std::string_view text);

// The shortest text that reads back as `number`.
std::string Printed(double number);

}  // namespace lastscan::formats::jcamp
