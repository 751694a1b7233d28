// Greedy line filling by display columns.
#include "drawing/wrap.h"

#include <algorithm>

#include "drawing/escape.h"

namespace lastscan::drawing {
namespace {

// The longest beginning of `word`, at least one character, of at most `columns`.
std::size_t BytesWithin(std::string_view word, int columns) {
  std::size_t end = 0;
  while (end < word.size()) {
    std::size_t next = end + 1;
    while (next < word.size() && (static_cast<unsigned char>(word[next]) & 0xC0) == 0x80) {
      ++next;  // the later bytes of one UTF-8 character
    }
    if (end > 0 && Columns(word.substr(0, next)) > columns) {
      break;
    }
    end = next;
  }
  return end;
}

}  // namespace

std::string Wrapped(std::string_view text, int width, std::string_view first,
                    std::string_view rest) {
  std::string all;
  std::string line(first);
  int used = Columns(first);
  bool empty = true;  // no word on this line yet
  const auto break_line = [&] {
    while (!line.empty() && line.back() == ' ') {
      line.pop_back();
    }
    all.append(line).push_back('\n');
    line = rest;
    used = Columns(rest);
    empty = true;
  };
  for (std::size_t begin = 0; begin < text.size();) {
    if (text[begin] == ' ' || text[begin] == '\n') {
      ++begin;
      continue;
    }
    std::size_t end = std::min(text.find_first_of(" \n", begin), text.size());
    if (text.substr(end).starts_with(" %")) {
      // A number keeps its per cent sign, and that what follows it.
      end = std::min(text.find_first_of(" \n", end + 2), text.size());
    }
    std::string_view word = text.substr(begin, end - begin);
    begin = end;
    if (!empty && used + 1 + Columns(word) > width) {
      break_line();
    }
    if (!empty) {
      line.push_back(' ');
      ++used;
    }
    while (used + Columns(word) > width) {
      const std::size_t bytes = BytesWithin(word, width - used);
      line.append(word.substr(0, bytes));
      word.remove_prefix(bytes);
      if (word.empty()) {
        break;
      }
      break_line();
    }
    line.append(word);
    used += Columns(word);
    empty = false;
  }
  break_line();
  return all;
}

}  // namespace lastscan::drawing
