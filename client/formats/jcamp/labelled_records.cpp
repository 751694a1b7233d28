// Cuts the text of a JCAMP-DX file into records and blocks.
#include "formats/jcamp/labelled_records.h"

#include "formats/recording.h"

namespace lastscan::formats::jcamp {
namespace {

// A record costs us more memory than the few bytes it may take in a file.
constexpr std::size_t kMostRecords = 200'000;

bool IsBlank(char c) { return c == ' ' || c == '\t'; }

std::string_view Trimmed(std::string_view text) {
  while (!text.empty() && IsBlank(text.front())) text.remove_prefix(1);
  while (!text.empty() && IsBlank(text.back())) text.remove_suffix(1);
  return text;
}

}  // namespace

void Fail(std::size_t line, const std::string& what) {
  throw Unreadable("line " + std::to_string(line) + ": " + what);
}

bool Lines::Next() {
  if (rest_.empty()) return false;
  std::size_t length = 0;
  while (length < rest_.size() && rest_[length] != '\n' && rest_[length] != '\r') ++length;
  line_ = rest_.substr(0, length);
  rest_.remove_prefix(length);
  if (rest_.substr(0, 2) == "\r\n") {
    rest_.remove_prefix(2);
  } else if (!rest_.empty()) {
    rest_.remove_prefix(1);
  }
  ++next_number_;
  return true;
}

const Record* Block::Find(std::string_view label) const {
  for (const Record& record : records) {
    if (record.label == label) return &record;
  }
  return nullptr;
}

std::string Comparable(std::string_view label) {
  std::string comparable;
  for (char c : label) {
    if (IsBlank(c) || c == '-' || c == '/' || c == '_') continue;
    comparable += c >= 'a' && c <= 'z' ? static_cast<char>(c - 'a' + 'A') : c;
  }
  return comparable;
}

std::string_view Bare(std::string_view line) { return Trimmed(line.substr(0, line.find("$$"))); }

std::vector<Block> SplitIntoBlocks(std::string_view text) {
  std::vector<Block> blocks;
  std::vector<std::size_t> open;  // blocks not ended yet, the innermost last
  Record* current = nullptr;      // the record that the lines belong to
  std::size_t count = 0;
  Lines lines(text);
  while (lines.Next()) {
    const std::string_view line = Trimmed(lines.line());
    const std::size_t equals = line.substr(0, 2) == "##" ? line.find('=') : line.npos;
    if (equals == line.npos) {  // more of the current record
      if (current != nullptr) {
        const char* begin = current->value.data();
        current->value = {
            begin, static_cast<std::size_t>(lines.line().data() - begin) + lines.line().size()};
      }
      continue;
    }
    current = nullptr;
    std::string label = Comparable(line.substr(2, equals - 2));
    if (label.empty() || label.front() == '$') continue;
    if (++count > kMostRecords) {
      Fail(lines.number(), "more than " + std::to_string(kMostRecords) +
                               " labels: not a file of one experiment; export it again");
    }
    if (label == "TITLE") {
      open.push_back(blocks.size());
      blocks.push_back({lines.number(), {}});
    }
    if (open.empty()) {
      Fail(lines.number(), "##" + label.substr(0, 40) +
                               "= stands outside any block: each block begins with ##TITLE= and "
                               "ends with ##END=; export the file again");
    }
    if (label == "END") {
      open.pop_back();
      continue;
    }
    Block& block = blocks[open.back()];
    block.records.push_back({std::move(label), line.substr(equals + 1), lines.number()});
    current = &block.records.back();
  }
  if (blocks.empty()) throw Unreadable("no ##TITLE=: this is not a JCAMP-DX file");
  if (!open.empty()) {
    throw Unreadable("the block that begins in line " + std::to_string(blocks[open.back()].line) +
                     " has no ##END=: the file is truncated or still being written; wait until "
                     "it is complete or export it again");
  }
  return blocks;
}

}  // namespace lastscan::formats::jcamp
