// Decodes a table of evenly spaced ordinates.
#include "formats/jcamp/ordinate_table.h"

#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <cstdint>
#include <optional>
#include <string>

#include "formats/jcamp/label_value.h"
#include "formats/jcamp/labelled_records.h"

namespace lastscan::formats::jcamp {
namespace {

enum class Kind : std::uint8_t {
  kOther,
  kGap,
  kDigit,
  kSign,
  kPoint,
  kSqueezed,
  kDifference,
  kDuplicate,
  kUnknown
};

struct Glyph {
  Kind kind = Kind::kOther;
  std::int8_t digit = 0;  // its value, sign included
};

constexpr std::array<Glyph, 256> MakeGlyphs() {
  std::array<Glyph, 256> glyphs{};
  const auto set = [&](char c, Kind kind, int digit) {
    glyphs[static_cast<unsigned char>(c)] = {kind, static_cast<std::int8_t>(digit)};
  };
  for (char c : {' ', '\t', ',', ';'}) set(c, Kind::kGap, 0);
  for (int d = 0; d <= 9; ++d) set(static_cast<char>('0' + d), Kind::kDigit, d);
  set('+', Kind::kSign, 1);
  set('-', Kind::kSign, -1);
  set('.', Kind::kPoint, 0);
  set('?', Kind::kUnknown, 0);
  set('@', Kind::kSqueezed, 0);
  set('%', Kind::kDifference, 0);
  for (int d = 1; d <= 9; ++d) {
    set(static_cast<char>('A' + d - 1), Kind::kSqueezed, d);
    set(static_cast<char>('a' + d - 1), Kind::kSqueezed, -d);
    set(static_cast<char>('J' + d - 1), Kind::kDifference, d);
    set(static_cast<char>('j' + d - 1), Kind::kDifference, -d);
  }
  for (int d = 1; d <= 8; ++d) set(static_cast<char>('S' + d - 1), Kind::kDuplicate, d);
  set('s', Kind::kDuplicate, 9);
  return glyphs;
}

constexpr std::array<Glyph, 256> kGlyphs = MakeGlyphs();

Glyph GlyphOf(char c) { return kGlyphs[static_cast<unsigned char>(c)]; }

bool IsE(char c) { return c == 'E' || c == 'e'; }

// True if the exponent of a free number, sign included, can begin at text[at].
bool SignedExponentAt(std::string_view text, std::size_t at) {
  return at + 2 < text.size() && IsE(text[at]) && GlyphOf(text[at + 1]).kind == Kind::kSign &&
         GlyphOf(text[at + 2]).kind == Kind::kDigit;
}

// True if `line` holds something that only a table with letters for digits holds.
bool HoldsLetters(std::string_view line) {
  bool in_exponent = false;
  bool any_exponent = false;
  std::size_t numbers = 0;
  Kind before = Kind::kGap;
  for (std::size_t i = 0; i < line.size(); ++i) {
    const char c = line[i];
    const Kind kind = GlyphOf(c).kind;
    if (IsE(c)) {
      const Kind after = i + 1 < line.size() ? GlyphOf(line[i + 1]).kind : Kind::kGap;
      const bool exponent = !in_exponent && (before == Kind::kDigit || before == Kind::kPoint) &&
                            (after == Kind::kDigit || SignedExponentAt(line, i));
      if (!exponent) return true;
      in_exponent = any_exponent = true;
      if (after == Kind::kSign) ++i;
      before = Kind::kSign;
      continue;
    }
    if (kind == Kind::kSqueezed || kind == Kind::kDifference || kind == Kind::kDuplicate) {
      return true;
    }
    const bool in_number = kind == Kind::kDigit || kind == Kind::kPoint;
    if (kind == Kind::kSign || (in_number && before == Kind::kGap)) ++numbers;
    if (!in_number) in_exponent = false;
    before = kind;
  }
  // "7E5" alone: as free number it would be an abscissa without ordinates.
  return any_exponent && numbers == 1;
}

class TableDecoder {
 public:
  TableDecoder(std::string_view lines, std::size_t first_line, const Abscissa& abscissa)
      : text_(lines), first_line_(first_line), abscissa_(abscissa) {}

  std::vector<double> Decode() {
    Lines scan(text_, first_line_);
    while (!letters_ && scan.Next()) letters_ = HoldsLetters(Bare(scan.line()));
    Lines lines(text_, first_line_);
    while (lines.Next()) {
      line_ = Bare(lines.line());
      number_ = lines.number();
      at_ = 0;
      if (!line_.empty()) DecodeLine();
    }
    if (values_.size() != abscissa_.points) {
      Fail(number_ == 0 ? first_line_ : number_,
           std::to_string(abscissa_.points) + " points are promised but the table holds " +
               std::to_string(values_.size()) +
               ": the file is damaged or was cut; export it again");
    }
    return std::move(values_);
  }

 private:
  void DecodeLine() {
    const Kind begin = GlyphOf(line_[0]).kind;
    if (begin != Kind::kDigit && begin != Kind::kSign && begin != Kind::kPoint) {
      Fail(number_, "a line of a table begins with its abscissa, this one with " +
                        Shown(line_.substr(0, 10)) + ": export the file again");
    }
    const bool check_due = in_difference_ && !values_.empty();
    const double printed = FreeNumber();
    CheckAbscissa(printed, check_due ? values_.size() - 1 : values_.size());
    bool first = true;
    while (at_ < line_.size()) {
      const Glyph glyph = GlyphOf(line_[at_]);
      switch (glyph.kind) {
        case Kind::kGap:
          ++at_;
          continue;
        case Kind::kDigit:
        case Kind::kSign:
        case Kind::kPoint:
          Value(FreeNumber(), first && check_due);
          break;
        case Kind::kSqueezed:
          Value(LetterNumber(glyph), first && check_due);
          break;
        case Kind::kDifference:
          if (first) FailOnFirst("a difference");
          difference_ = LetterNumber(glyph);
          in_difference_ = true;
          last_ += difference_;
          Append();
          break;
        case Kind::kDuplicate:
          if (first) FailOnFirst("a duplicate count");
          Duplicate(LetterNumber(glyph));
          break;
        case Kind::kUnknown:
          Fail(number_, "point " + std::to_string(values_.size() + 1) +
                            " is unknown (?): Lastscan needs every point; export the file again");
        case Kind::kOther:
          Fail(number_, Shown(line_.substr(at_, 10)) +
                            " is no number of any form of the standard: export the file again");
      }
      first = false;
    }
    if (first) Fail(number_, "an abscissa without ordinates: export the file again");
  }

  [[noreturn]] void FailOnFirst(const char* what) const {
    Fail(number_,
         std::string(what) + " where the first ordinate of the line is due: export the file again");
  }

  void CheckAbscissa(double printed, std::size_t point) const {
    const double spacing = abscissa_.spacing();
    const double due = abscissa_.first + static_cast<double>(point) * spacing;
    const double found = printed * abscissa_.factor;
    const double last_digit = std::pow(10.0, last_exponent_);
    const double allowed = 1.001 * (std::abs(spacing) + std::abs(last_digit * abscissa_.factor)) +
                           1e-9 * std::max(std::abs(abscissa_.first), std::abs(abscissa_.last));
    if (!(std::abs(found - due) <= allowed)) {
      Fail(number_, "the abscissa " + Printed(found) + " stands where " + Printed(due) +
                        " is due: a line is missing or damaged; export the file again");
    }
  }

  // Takes an ordinate that is written out, or checks it against the last point.
  void Value(double value, bool check) {
    if (check) {
      // Differences of whole numbers add up exactly; of fractions, to rounding.
      const double allowed = 1e-12 * std::max(std::abs(value), std::abs(last_));
      if (!(std::abs(value - last_) <= allowed)) {
        Fail(number_, "the check value " + Printed(value) + " differs from the last point, " +
                          Printed(last_) + ": the file is damaged; export it again");
      }
    }
    in_difference_ = false;
    last_ = value;
    if (!check) Append();
  }

  void Append() {
    if (values_.size() == abscissa_.points) {
      Fail(number_, "more points than the " + std::to_string(abscissa_.points) +
                        " promised: the file is damaged; export it again");
    }
    values_.push_back(last_);
  }

  void Duplicate(double count) {
    // The count includes the point that stands already. Append() stops a count
    // that goes on past the promised points.
    for (double more = 1; more < count; ++more) {
      if (in_difference_) last_ += difference_;
      Append();
    }
  }

  // The end of the digits, with at most one point, that begin at `from`.
  std::size_t EndOfDigits(std::size_t from) const {
    bool point = false;
    std::size_t end = from;
    while (end < line_.size()) {
      const Kind kind = GlyphOf(line_[end]).kind;
      if (kind == Kind::kPoint && !point) {
        point = true;
      } else if (kind != Kind::kDigit) {
        break;
      }
      ++end;
    }
    return end;
  }

  double Parse(std::string_view digits) const {
    const std::optional<double> number = ParseNumber(digits);
    if (!number) {
      Fail(number_, Shown(digits) +
                        " is no number of any form of the standard, or too large: "
                        "export the file again");
    }
    return *number;
  }

  // A free or packed number at at_; notes the power of ten of its last digit.
  double FreeNumber() {
    const std::size_t begin = at_;
    if (GlyphOf(line_[at_]).kind == Kind::kSign) ++at_;
    const std::size_t digits = at_;
    at_ = EndOfDigits(at_);
    const std::string_view mantissa = line_.substr(digits, at_ - digits);
    const std::size_t point = mantissa.find('.');
    double exponent =
        point == mantissa.npos ? 0 : -static_cast<double>(mantissa.size() - point - 1);
    const bool signed_exponent = SignedExponentAt(line_, at_);
    const bool plain_exponent = !letters_ && at_ + 1 < line_.size() && IsE(line_[at_]) &&
                                GlyphOf(line_[at_ + 1]).kind == Kind::kDigit;
    if (signed_exponent || plain_exponent) {
      const std::size_t after_e = at_ + 1;
      at_ += signed_exponent ? 2 : 1;
      while (at_ < line_.size() && GlyphOf(line_[at_]).kind == Kind::kDigit) ++at_;
      exponent += Parse(line_.substr(after_e, at_ - after_e));
    }
    if (at_ < line_.size() && GlyphOf(line_[at_]).kind == Kind::kPoint) {
      Fail(number_, Shown(line_.substr(begin, at_ + 1 - begin)) +
                        " is no number of any form of the standard: export the file again");
    }
    last_exponent_ = exponent;
    return Parse(line_.substr(begin, at_ - begin));
  }

  // A number whose first digit is a letter, at at_.
  double LetterNumber(Glyph glyph) {
    const std::size_t begin = ++at_;
    const bool negative = glyph.digit < 0;
    double magnitude = std::abs(glyph.digit);
    const std::size_t end = EndOfDigits(begin);
    // 15 digits are exact in a double whichever way they are added up.
    constexpr std::size_t kExactDigits = 14;
    if (end - begin <= kExactDigits && (end == begin || line_[end - 1] != '.')) {
      while (at_ < end && line_[at_] != '.') magnitude = magnitude * 10 + (line_[at_++] - '0');
    }
    if (at_ != end) {
      std::string digits(1, static_cast<char>('0' + std::abs(glyph.digit)));
      digits += line_.substr(begin, end - begin);
      magnitude = Parse(digits);
      at_ = end;
    }
    return negative ? -magnitude : magnitude;
  }

  const std::string_view text_;
  const std::size_t first_line_;
  const Abscissa& abscissa_;
  bool letters_ = false;  // the table has letters for digits

  std::string_view line_;
  std::size_t number_ = 0;    // of line_
  std::size_t at_ = 0;        // in line_
  double last_exponent_ = 0;  // power of ten of the last digit of the last free number

  std::vector<double> values_;
  double last_ = 0;             // the last ordinate
  double difference_ = 0;       // the last difference
  bool in_difference_ = false;  // the last ordinate came as a difference
};

}  // namespace

std::vector<double> DecodeOrdinates(std::string_view lines, std::size_t first_line,
                                    const Abscissa& abscissa) {
  return TableDecoder(lines, first_line, abscissa).Decode();
}

}  // namespace lastscan::formats::jcamp
