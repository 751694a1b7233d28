// Numbers and ranges on the command line: see number_option.h.
#include "commands/number_option.h"

#include <charconv>
#include <cmath>
#include <optional>

#include "commands/command.h"

namespace lastscan::commands {
namespace {

template <typename Number>
std::optional<Number> WholeText(std::string_view text) {
  Number value{};
  const auto [end, error] = std::from_chars(text.data(), text.data() + text.size(), value);
  if (error != std::errc() || end != text.data() + text.size()) return std::nullopt;
  return value;
}

std::optional<double> Finite(std::string_view text) {
  const auto value = WholeText<double>(text);
  return value && std::isfinite(*value) ? value : std::nullopt;
}

[[noreturn]] void Refuse(const std::string& option, const std::string& text,
                         const std::string& wanted) {
  throw WrongUse(option + " must be " + wanted + ", not \"" + text + "\"");
}

}  // namespace

double ReadNumber(const std::string& option, const std::string& text) {
  const auto value = Finite(text);
  if (!value) Refuse(option, text, "a number");
  return *value;
}

double ReadPositive(const std::string& option, const std::string& text) {
  const auto value = Finite(text);
  if (!value || *value <= 0) Refuse(option, text, "a number above 0");
  return *value;
}

double ReadShare(const std::string& option, const std::string& text) {
  const auto value = Finite(text);
  if (!value || *value <= 0 || *value >= 1) {
    Refuse(option, text, "a number above 0 and below 1");
  }
  return *value;
}

std::uint64_t ReadCount(const std::string& option, const std::string& text, std::uint64_t most) {
  const auto value = WholeText<std::uint64_t>(text);
  if (!value || *value == 0 || *value > most) {
    Refuse(option, text, "a whole number from 1 to " + std::to_string(most));
  }
  return *value;
}

v1::ShiftRange ReadRange(const std::string& option, const std::string& text) {
  const std::size_t colon = text.find(':');
  std::optional<double> low;
  std::optional<double> high;
  if (colon != std::string::npos) {
    low = Finite(std::string_view(text).substr(0, colon));
    high = Finite(std::string_view(text).substr(colon + 1));
  }
  if (!low || !high) Refuse(option, text, "LOW:HIGH in ppm, such as 20:60");
  if (*low >= *high) {
    Refuse(option, text, "LOW:HIGH in ppm with the lower shift first");
  }
  v1::ShiftRange range;
  range.set_low_ppm(*low);
  range.set_high_ppm(*high);
  return range;
}

}  // namespace lastscan::commands
