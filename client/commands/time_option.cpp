// Times as people write them: see time_option.h.
#include "commands/time_option.h"

#include <google/protobuf/util/time_util.h>

#include <array>
#include <cstdio>
#include <optional>

#include "commands/command.h"

namespace lastscan::commands {
namespace {

// Seconds since 1970 of a local date and time; nothing if the calendar has no
// such moment (the 31st of February, an hour that summer time leaves out).
std::optional<std::time_t> FromLocal(const std::tm& wanted) {
  std::tm given = wanted;
  given.tm_isdst = -1;
  const std::time_t time = std::mktime(&given);
  if (time == -1 || given.tm_mday != wanted.tm_mday || given.tm_mon != wanted.tm_mon ||
      given.tm_hour != wanted.tm_hour || given.tm_min != wanted.tm_min ||
      given.tm_sec != wanted.tm_sec) {
    return std::nullopt;
  }
  return time;
}

// `text` read by strptime to its last character.
bool Matches(const std::string& text, const char* format, std::tm& time) {
  time = {};
  const char* end = strptime(text.c_str(), format, &time);
  return end != nullptr && *end == '\0';
}

std::optional<std::time_t> NextTimeOfDay(const std::tm& time_of_day, std::time_t now) {
  std::tm today{};
  localtime_r(&now, &today);
  // Two days on covers a time of day that summer time leaves out tomorrow.
  for (int days = 0; days <= 2; ++days) {
    std::tm wanted = today;
    wanted.tm_mday += days;
    wanted.tm_hour = 12;
    wanted.tm_min = 0;
    wanted.tm_sec = 0;
    wanted.tm_isdst = -1;
    std::mktime(&wanted);  // carries a day past the month's end
    wanted.tm_hour = time_of_day.tm_hour;
    wanted.tm_min = time_of_day.tm_min;
    const std::optional<std::time_t> time = FromLocal(wanted);
    if (time && *time > now) return time;
  }
  return std::nullopt;
}

}  // namespace

google::protobuf::Timestamp ReadTime(const std::string& option, const std::string& text,
                                     std::time_t now) {
  google::protobuf::Timestamp stamp;
  if (google::protobuf::util::TimeUtil::FromString(text, &stamp)) return stamp;

  std::tm fields{};
  std::optional<std::time_t> time;
  if (Matches(text, "%Y-%m-%d %H:%M", fields) || Matches(text, "%Y-%m-%d %H:%M:%S", fields)) {
    time = FromLocal(fields);
  } else if (Matches(text, "%H:%M", fields)) {
    time = NextTimeOfDay(fields, now);
  }
  if (!time) {
    throw WrongUse(option + " \"" + text +
                   "\" is no time: write 2027-01-31T07:30:00+01:00, \"2027-01-31 07:30\" or 07:30");
  }
  stamp.set_seconds(*time);
  return stamp;
}

std::string LocalTime(std::time_t time) {
  std::tm fields{};
  localtime_r(&time, &fields);
  std::array<char, 32> text{};
  std::strftime(text.data(), text.size(), "%Y-%m-%d %H:%M", &fields);
  return text.data();
}

}  // namespace lastscan::commands
