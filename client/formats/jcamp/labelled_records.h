// Cuts the text of a JCAMP-DX file into its labelled data records (##LABEL= value)
// and its blocks (##TITLE= to ##END=). Nothing is copied: values are views.
#pragma once

#include <cstddef>
#include <string>
#include <string_view>
#include <vector>

namespace lastscan::formats::jcamp {

// Begins a message that is about a line: throws Unreadable("line N: " + what).
// `ReadJcampDx` puts the file's name before it.
[[noreturn]] void Fail(std::size_t line, const std::string& what);

// The lines of a text, whichever of LF, CR and CRLF ends them.
class Lines {
 public:
  explicit Lines(std::string_view text, std::size_t first_number = 1)
      : rest_(text), next_number_(first_number) {}

  // Steps to the next line; false after the last one.
  bool Next();
  std::string_view line() const { return line_; }          // without its end
  std::size_t number() const { return next_number_ - 1; }  // counted from 1
  std::string_view rest() const { return rest_; }          // all after this line

 private:
  std::string_view rest_;
  std::string_view line_;
  std::size_t next_number_;
};

struct Record {
  std::string label;       // as Comparable() gives it, without ## and =
  std::string_view value;  // all up to the next record, comments included
  std::size_t line = 0;    // where the label stands
};

struct Block {
  std::size_t line = 0;         // where its ##TITLE= stands
  std::vector<Record> records;  // without private ones (##$...) and inner blocks

  // The first record of that label, which must be in comparable form; nullptr
  // when there is none.
  const Record* Find(std::string_view label) const;
};

// A label in the form in which the standard compares them: capitals, without
// blanks and without '-', '/' and '_'.
std::string Comparable(std::string_view label);

// A line without its comment ($$ ...) and without blanks at its ends.
std::string_view Bare(std::string_view line);

// All blocks, outer ones before the blocks they hold, in the order of the file.
// Throws Unreadable if there is none, if one does not end (the file is truncated
// or still being written) or if there are more records than any sane file has.
std::vector<Block> SplitIntoBlocks(std::string_view text);

}  // namespace lastscan::formats::jcamp
