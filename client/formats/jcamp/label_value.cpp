// Reads the value of a record.
#include "formats/jcamp/label_value.h"

#include <charconv>
#include <cmath>

namespace lastscan::formats::jcamp {
namespace {

constexpr std::size_t kMostColumns = 64;

// Length of the UTF-8 sequence at the front of `text`; 0 if there is none.
// Surrogates and overlong forms are refused, as the standard of UTF-8 asks.
std::size_t Utf8Length(std::string_view text) {
  const auto byte = [&](std::size_t i) { return static_cast<unsigned char>(text[i]); };
  const unsigned char lead = byte(0);
  if (lead < 0x80) return 1;
  const std::size_t length = lead >= 0xC2 && lead <= 0xDF   ? 2
                             : lead >= 0xE0 && lead <= 0xEF ? 3
                             : lead >= 0xF0 && lead <= 0xF4 ? 4
                                                            : 0;
  if (length == 0 || text.size() < length) return 0;
  for (std::size_t i = 1; i < length; ++i) {
    if ((byte(i) & 0xC0) != 0x80) return 0;
  }
  if ((lead == 0xE0 && byte(1) < 0xA0) || (lead == 0xED && byte(1) > 0x9F) ||
      (lead == 0xF0 && byte(1) < 0x90) || (lead == 0xF4 && byte(1) > 0x8F)) {
    return 0;
  }
  return length;
}

bool IsUtf8(std::string_view text) {
  while (!text.empty()) {
    const std::size_t length = Utf8Length(text);
    if (length == 0) return false;
    text.remove_prefix(length);
  }
  return true;
}

std::string FromLatin1(std::string_view text) {
  std::string utf8;
  for (char c : text) {
    const auto byte = static_cast<unsigned char>(c);
    if (byte < 0x80) {
      utf8 += c;
    } else {
      utf8 += static_cast<char>(0xC0 | byte >> 6);
      utf8 += static_cast<char>(0x80 | (byte & 0x3F));
    }
  }
  return utf8;
}

std::string_view FirstLine(std::string_view value) {
  Lines lines(value);
  return lines.Next() ? Bare(lines.line()) : std::string_view();
}

}  // namespace

std::string TextOf(const Record* record) {
  if (record == nullptr) return {};
  const std::string_view line = FirstLine(record->value);
  std::string text = IsUtf8(line) ? std::string(line) : FromLatin1(line);
  for (char& c : text) {
    if (static_cast<unsigned char>(c) < 0x20 || c == 0x7F) c = ' ';
  }
  return text;
}

std::optional<double> ParseNumber(std::string_view text) {
  if (text.substr(0, 1) == "+" && text.substr(1, 1) != "-") text.remove_prefix(1);
  double number = 0;
  const char* end = text.data() + text.size();
  const auto [stop, error] = std::from_chars(text.data(), end, number);
  if (text.empty() || error != std::errc() || stop != end || !std::isfinite(number)) return {};
  return number;
}

std::optional<double> NumberOf(const Record* record) {
  if (record == nullptr) return {};
  const std::string_view text = FirstLine(record->value);
  if (text.empty()) return {};
  const std::optional<double> number = ParseNumber(text);
  if (!number) {
    Fail(record->line, record->label + " should be a number, but reads " + Shown(text) +
                           ": correct it or export the file again");
  }
  return number;
}

std::optional<std::size_t> CountOf(const Record* record) {
  const std::optional<double> number = NumberOf(record);
  if (!number) return {};
  if (*number < 0 || *number != std::floor(*number) || *number >= 9007199254740992.0) {
    Fail(record->line, record->label + " should be a count, but reads " + Printed(*number) +
                           ": correct it or export the file again");
  }
  return static_cast<std::size_t>(*number);
}

std::vector<std::string> ColumnsOf(const Record& record) {
  std::string joined;
  Lines lines(record.value);
  while (lines.Next()) {
    joined += Bare(lines.line());
    joined += ' ';
  }
  std::vector<std::string> columns;
  std::string_view rest = joined;
  while (true) {
    const std::size_t comma = rest.find(',');
    columns.emplace_back(Bare(rest.substr(0, comma)));
    if (comma == rest.npos) return columns;
    if (columns.size() == kMostColumns) {
      Fail(record.line, record.label + " has more than " + std::to_string(kMostColumns) +
                            " columns: export the file again");
    }
    rest.remove_prefix(comma + 1);
  }
}

std::string Shown(std::string_view text) {
  constexpr std::size_t kLongest = 40;
  std::string shown = "'";
  for (char c : text.substr(0, kLongest)) shown += c >= 0x20 && c < 0x7F ? c : '?';
  return shown + (text.size() > kLongest ? "...'" : "'");
}

std::string Printed(double number) {
  char buffer[32];
  const auto result = std::to_chars(buffer, buffer + sizeof buffer, number);
  return std::string(buffer, result.ptr);
}

}  // namespace lastscan::formats::jcamp
