// UTF-8 is decoded by the C library under its built-in C.UTF-8 locale, whatever
// locale the program runs in.
#include "drawing/escape.h"

#include <locale.h>
#include <wchar.h>

#include <algorithm>

namespace lastscan::drawing {
namespace {

constexpr char32_t kReplacement = 0xFFFD;
constexpr std::string_view kReplacementUtf8 = "\xEF\xBF\xBD";
constexpr std::string_view kEllipsis = "\xE2\x80\xA6";

// Makes C.UTF-8 the locale of this thread while it lives.
class Utf8Locale {
 public:
  Utf8Locale() : before_(uselocale(Shared())) {}
  ~Utf8Locale() { uselocale(before_); }
  Utf8Locale(const Utf8Locale&) = delete;
  Utf8Locale& operator=(const Utf8Locale&) = delete;

 private:
  static locale_t Shared() {
    static const locale_t kLocale = newlocale(LC_CTYPE_MASK, "C.UTF-8", nullptr);
    return kLocale;
  }
  locale_t before_;
};

// One character of `text` from `offset`: its code and its bytes. A byte that is
// not UTF-8 gives kReplacement and one byte.
struct Character {
  char32_t code;
  std::size_t bytes;
};

Character Next(std::string_view text, std::size_t offset) {
  wchar_t wide = 0;
  mbstate_t state{};
  const std::size_t used = mbrtowc(&wide, text.data() + offset, text.size() - offset, &state);
  if (used == 0) {
    return {0, 1};
  }
  if (used > text.size() - offset) {  // (size_t)-1 and -2: not UTF-8, or cut short
    return {kReplacement, 1};
  }
  return {static_cast<char32_t>(wide), used};
}

bool Unwanted(char32_t code) {
  const auto within = [code](char32_t first, char32_t last) {
    return code >= first && code <= last;
  };
  return code < 0x20 || within(0x7F, 0x9F) || code == 0x00AD ||  // soft hyphen
         code == 0x061C ||                                       // direction mark
         within(0x200B, 0x200F) ||                               // no width, direction marks
         within(0x2028, 0x202E) ||                               // separators, direction overrides
         within(0x2060, 0x206F) ||                               // no shape, direction isolates
         within(0xD800, 0xDFFF) || code == 0xFEFF ||             // surrogates, byte order mark
         within(0xFFF9, 0xFFFB) ||                               // annotations
         within(0xFFFE, 0xFFFF) ||                               // never characters
         within(0xE0000, 0xE007F);                               // invisible tags
}

int ColumnsOf(char32_t code) { return std::max(0, wcwidth(static_cast<wchar_t>(code))); }

}  // namespace

std::string ForTerminal(std::string_view text) {
  const Utf8Locale locale;
  std::string clean;
  clean.reserve(text.size());
  for (std::size_t offset = 0; offset < text.size();) {
    const Character character = Next(text, offset);
    if (character.code == kReplacement || Unwanted(character.code)) {
      clean.append(kReplacementUtf8);
    } else {
      clean.append(text.substr(offset, character.bytes));
    }
    offset += character.bytes;
  }
  return clean;
}

std::string ForMarkup(std::string_view text) {
  std::string escaped;
  for (char c : ForTerminal(text)) {
    switch (c) {
      case '&':
        escaped += "&amp;";
        break;
      case '<':
        escaped += "&lt;";
        break;
      case '>':
        escaped += "&gt;";
        break;
      case '"':
        escaped += "&quot;";
        break;
      case '\'':
        escaped += "&#39;";
        break;
      default:
        escaped += c;
    }
  }
  return escaped;
}

std::string ForAddress(std::string_view text) {
  constexpr std::string_view kHex = "0123456789ABCDEF";
  constexpr std::string_view kPlain =
      "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789-_.~";
  std::string encoded;
  for (char c : text) {
    if (kPlain.find(c) != std::string_view::npos) {
      encoded += c;
    } else {
      const auto byte = static_cast<unsigned char>(c);
      encoded += '%';
      encoded += kHex[byte >> 4];
      encoded += kHex[byte & 15];
    }
  }
  return encoded;
}

int Columns(std::string_view text) {
  const Utf8Locale locale;
  int columns = 0;
  for (std::size_t offset = 0; offset < text.size();) {
    const Character character = Next(text, offset);
    columns += ColumnsOf(character.code);
    offset += character.bytes;
  }
  return columns;
}

std::string CutTo(std::string_view text, int columns) {
  if (Columns(text) <= columns) {
    return std::string(text);
  }
  const Utf8Locale locale;
  std::string cut;
  int used = 0;
  for (std::size_t offset = 0; offset < text.size();) {
    const Character character = Next(text, offset);
    const int width = ColumnsOf(character.code);
    if (used + width > columns - 1) {
      break;
    }
    used += width;
    cut.append(text.substr(offset, character.bytes));
    offset += character.bytes;
  }
  return cut.append(kEllipsis);
}

}  // namespace lastscan::drawing
