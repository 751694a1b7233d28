// One table of a TOML file, read key by key.
#include "service/settings_table.h"

#include <google/protobuf/timestamp.pb.h>

#include <algorithm>
#include <chrono>
#include <cmath>
#include <sstream>

#include "service/settings_file.h"

namespace lastscan::service {
namespace {

// A number as a person would write it: "0.05", not "0.050000".
std::string Written(double value) {
  std::ostringstream text;
  text.precision(15);
  text << value;
  return text.str();
}

std::string KindOf(const toml::node& node) {
  switch (node.type()) {
    case toml::node_type::table:
      return "a table";
    case toml::node_type::array:
      return "a list";
    case toml::node_type::string:
      return "text";
    case toml::node_type::integer:
      return "a whole number";
    case toml::node_type::floating_point:
      return "a number";
    case toml::node_type::boolean:
      return "true or false";
    case toml::node_type::date:
      return "a date";
    case toml::node_type::time:
      return "a time of day";
    case toml::node_type::date_time:
      return "a date and time";
    case toml::node_type::none:
      break;
  }
  return "nothing";
}

std::string At(const std::string& name, const toml::source_region& source) {
  return name + ":" + std::to_string(source.begin.line) + ": ";
}

std::string Allowed(Bounds bounds) {
  if (bounds.high == Bounds{}.high) return Written(bounds.low) + " or more";
  return "from " + Written(bounds.low) + " to " + Written(bounds.high);
}

// Keys that are not plain words are quoted, as they must be in the file.
std::string Key(std::string_view key) {
  const bool plain = !key.empty() && std::all_of(key.begin(), key.end(), [](unsigned char c) {
    return std::isalnum(c) != 0 || c == '_' || c == '-';
  });
  return plain ? std::string(key) : '"' + std::string(key) + '"';
}

}  // namespace

std::string SettingsTable::FullKey(std::string_view key) const {
  if (key.empty()) return path_;
  return path_.empty() ? Key(key) : path_ + "." + Key(key);
}

void SettingsTable::Fail(const toml::node& node, std::string_view key,
                         const std::string& what) const {
  throw SettingsError(At(name_, node.source()) + FullKey(key) + ": " + what);
}

void SettingsTable::Fail(std::string_view key, const std::string& what) const {
  const toml::node* node = table_.get(key);
  Fail(node == nullptr ? table_ : *node, key, what);
}

const toml::node* SettingsTable::Find(std::string_view key) {
  known_.emplace(key);
  return table_.get(key);
}

double SettingsTable::Number(const toml::node& node, std::string_view key) const {
  const std::optional<double> value = node.is_number() ? node.value<double>() : std::nullopt;
  if (!value) Fail(node, key, "is " + KindOf(node) + ": write a number");
  if (!std::isfinite(*value)) Fail(node, key, "is not a finite number: write one");
  return *value;
}

v1::ShiftRange SettingsTable::Range(const toml::node& node, std::string_view key) const {
  const toml::array* ends = node.as_array();
  if (ends == nullptr || ends->size() != 2 || !(*ends)[0].is_number() || !(*ends)[1].is_number()) {
    Fail(node, key, "is no range: write [low, high] in ppm");
  }
  v1::ShiftRange range;
  range.set_low_ppm(Number((*ends)[0], key));
  range.set_high_ppm(Number((*ends)[1], key));
  if (range.low_ppm() >= range.high_ppm()) {
    Fail(node, key, "has its low end at or above its high end: write [low, high] in ppm");
  }
  return range;
}

void SettingsTable::Read(std::string_view key, std::string* value) {
  const toml::node* node = Find(key);
  if (node == nullptr) return;
  if (!node->is_string()) Fail(*node, key, "is " + KindOf(*node) + ": write text in quotes");
  *value = *node->value<std::string>();
  const auto is_control = [](unsigned char c) { return c < ' ' || c == 0x7f; };
  if (std::any_of(value->begin(), value->end(), is_control)) {
    Fail(*node, key, "has a control character: remove it");
  }
}

void SettingsTable::Read(std::string_view key, double* value, Bounds bounds) {
  const toml::node* node = Find(key);
  if (node == nullptr) return;
  const double number = Number(*node, key);
  if (number < bounds.low || number > bounds.high) {
    Fail(*node, key, "is " + Written(number) + ": allowed is " + Allowed(bounds));
  }
  *value = number;
}

void SettingsTable::Read(std::string_view key, std::uint64_t* value, Bounds bounds) {
  const toml::node* node = Find(key);
  if (node == nullptr) return;
  const std::optional<std::int64_t> number =
      node->is_integer() ? node->value<std::int64_t>() : std::nullopt;
  if (!number) Fail(*node, key, "is " + KindOf(*node) + ": write a whole number");
  if (static_cast<double>(*number) < bounds.low || static_cast<double>(*number) > bounds.high) {
    Fail(*node, key, "is " + std::to_string(*number) + ": allowed is " + Allowed(bounds));
  }
  *value = static_cast<std::uint64_t>(*number);
}

void SettingsTable::Read(std::string_view key, v1::ShiftRange* value) {
  const toml::node* node = Find(key);
  if (node != nullptr) *value = Range(*node, key);
}

void SettingsTable::Read(std::string_view key,
                         google::protobuf::RepeatedPtrField<v1::ShiftRange>* value) {
  const toml::node* node = Find(key);
  if (node == nullptr) return;
  const toml::array* ranges = node->as_array();
  if (ranges == nullptr) Fail(*node, key, "is " + KindOf(*node) + ": write [[low, high], ...]");
  value->Clear();
  for (const toml::node& range : *ranges) *value->Add() = Range(range, key);
}

void SettingsTable::Read(std::string_view key, google::protobuf::Timestamp* value) {
  const toml::node* node = Find(key);
  if (node == nullptr) return;
  const toml::date_time* time = node->is_date_time() ? &node->as_date_time()->get() : nullptr;
  if (time == nullptr || !time->offset) {
    Fail(*node, key,
         "is no point in time: write date, time and offset from UTC without quotes, as in "
         "2027-01-31T07:30:00+01:00");
  }
  using std::chrono::day, std::chrono::month, std::chrono::year;
  const std::chrono::sys_days date = std::chrono::year_month_day(
      year(time->date.year), month(time->date.month), day(time->date.day));
  const std::int64_t seconds = std::chrono::seconds(date.time_since_epoch()).count() +
                               time->time.hour * 3600 + time->time.minute * 60 + time->time.second -
                               time->offset->minutes * 60;
  value->set_seconds(seconds);
  value->set_nanos(static_cast<std::int32_t>(time->time.nanosecond));
}

void SettingsTable::Read(std::string_view key, const std::vector<std::string_view>& words,
                         int* value) {
  const toml::node* node = Find(key);
  if (node == nullptr) return;
  std::string list;
  for (std::string_view word : words) {
    list.append(list.empty() ? "" : ", ").append("\"").append(word).append("\"");
  }
  const std::optional<std::string> text =
      node->is_string() ? node->value<std::string>() : std::nullopt;
  const auto word = text ? std::find(words.begin(), words.end(), *text) : words.end();
  if (word == words.end()) {
    Fail(*node, key, (text ? "is \"" + *text + "\"" : "is " + KindOf(*node)) + ": write " + list);
  }
  *value = static_cast<int>(word - words.begin());
}

void SettingsTable::ReadTable(std::string_view key,
                              const std::function<void(SettingsTable&)>& read) {
  const toml::node* node = Find(key);
  if (node == nullptr) return;
  if (!node->is_table()) Fail(*node, key, "is " + KindOf(*node) + ": write a table");
  SettingsTable table(*node->as_table(), name_, FullKey(key));
  read(table);
}

void SettingsTable::ReadNamed(std::string_view key,
                              const std::function<void(const std::string&, SettingsTable&)>& read) {
  ReadTable(key, [&](SettingsTable& outer) {
    for (const auto& entry : outer.table_) {
      const std::string name(entry.first.str());
      outer.ReadTable(name, [&](SettingsTable& inner) { read(name, inner); });
    }
  });
}

void SettingsTable::ReadEach(std::string_view key,
                             const std::function<void(SettingsTable&)>& read) {
  const toml::node* node = Find(key);
  if (node == nullptr) return;
  const toml::array* list = node->as_array();
  const std::string write = ": write a table [[" + FullKey(key) + "]] for each";
  if (list == nullptr) Fail(*node, key, "is " + KindOf(*node) + write);
  for (const toml::node& element : *list) {
    if (!element.is_table()) Fail(element, key, "holds " + KindOf(element) + write);
    SettingsTable table(*element.as_table(), name_, FullKey(key));
    read(table);
  }
}

void SettingsTable::Close() const {
  for (const auto& [key, node] : table_) {
    if (known_.contains(key.str())) continue;
    std::string known;
    for (const std::string& name : known_) known += (known.empty() ? "" : ", ") + name;
    throw SettingsError(At(name_, key.source()) + FullKey(key.str()) +
                        ": unknown key; known here: " + known);
  }
}

}  // namespace lastscan::service
