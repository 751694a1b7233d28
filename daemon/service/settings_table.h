// One table of a TOML file, read key by key. Every value that was not asked for
// is unknown, so the list of known keys is the code that reads them.
#pragma once

#include <toml++/toml.h>

#include <cstdint>
#include <functional>
#include <limits>
#include <set>
#include <string>
#include <string_view>
#include <vector>

#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::service {

// The values that a number may have; the ends belong to it.
struct Bounds {
  double low = 0;
  double high = std::numeric_limits<double>::max();
};

class SettingsTable {
 public:
  // `name` is the file's, `path` the table's own key ("" at the top).
  SettingsTable(const toml::table& table, std::string name, std::string path)
      : table_(table), name_(std::move(name)), path_(std::move(path)) {}

  // Is the key there? It is not read by this.
  bool Has(std::string_view key) const { return table_.contains(key); }

  // Each leaves `value` alone when the key is absent, and throws SettingsError
  // when it is there with a wrong type or a value outside `bounds`. A number may
  // be written with or without a decimal point where it may have one.
  void Read(std::string_view key, std::string* value);
  void Read(std::string_view key, double* value, Bounds bounds);
  void Read(std::string_view key, std::uint64_t* value, Bounds bounds);
  // A range of shifts as [low, high] in ppm.
  void Read(std::string_view key, v1::ShiftRange* value);
  // A list of such ranges.
  void Read(std::string_view key, google::protobuf::RepeatedPtrField<v1::ShiftRange>* value);
  // A point in time with its offset from UTC.
  void Read(std::string_view key, google::protobuf::Timestamp* value);
  // One of `words`; `value` becomes its place in them.
  void Read(std::string_view key, const std::vector<std::string_view>& words, int* value);

  // The tables behind `key`: one by name for a table of tables, one each for an
  // array of tables. `read` gets the name ("" in an array) and the table, and
  // must call its Close.
  void ReadTable(std::string_view key, const std::function<void(SettingsTable&)>& read);
  void ReadNamed(std::string_view key,
                 const std::function<void(const std::string&, SettingsTable&)>& read);
  void ReadEach(std::string_view key, const std::function<void(SettingsTable&)>& read);

  // Throws SettingsError if the table holds a key that nobody has read.
  void Close() const;

  // Throws SettingsError for `key` (the table itself if it is absent).
  [[noreturn]] void Fail(std::string_view key, const std::string& what) const;

 private:
  const toml::node* Find(std::string_view key);
  std::string FullKey(std::string_view key) const;
  [[noreturn]] void Fail(const toml::node& node, std::string_view key,
                         const std::string& what) const;
  double Number(const toml::node& node, std::string_view key) const;
  v1::ShiftRange Range(const toml::node& node, std::string_view key) const;

  const toml::table& table_;
  std::string name_;
  std::string path_;
  std::set<std::string, std::less<>> known_;
};

}  // namespace lastscan::service
