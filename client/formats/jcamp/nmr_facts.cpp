// What the NMR labels of a block say about the experiment.
#include "formats/jcamp/nmr_facts.h"

#include <cctype>
#include <chrono>
#include <cmath>
#include <ctime>

#include "formats/jcamp/label_value.h"

namespace lastscan::formats::jcamp {
namespace {

// Steps through a text that is read from left to right.
class Cursor {
 public:
  explicit Cursor(std::string_view text) : rest_(text) {}

  // A number of `least` to `most` digits.
  std::optional<int> Digits(int least, int most) {
    int number = 0;
    int count = 0;
    while (count < most && !rest_.empty() && rest_[0] >= '0' && rest_[0] <= '9') {
      number = number * 10 + (rest_[0] - '0');
      rest_.remove_prefix(1);
      ++count;
    }
    if (count < least) return {};
    taken_ = count;
    return number;
  }
  // How many digits the last number had.
  int taken() const { return taken_; }
  // One character out of `any`; 0 if the next is none of them.
  char OneOf(std::string_view any) {
    if (rest_.empty() || any.find(rest_[0]) == any.npos) return 0;
    const char c = rest_[0];
    rest_.remove_prefix(1);
    return c;
  }
  void SkipBlanks() {
    while (OneOf(" \t") != 0) {
    }
  }
  bool done() const { return rest_.empty(); }

 private:
  std::string_view rest_;
  int taken_ = 0;
};

struct ClockTime {
  int hours = 0;
  int minutes = 0;
  int seconds = 0;
  int nanoseconds = 0;
  std::optional<int> offset_minutes;  // east of Greenwich
};

// "07:30", "07:30:00.25", an offset after it.
bool ReadClock(Cursor& cursor, ClockTime& time) {
  const auto hours = cursor.Digits(1, 2);
  if (!hours || cursor.OneOf(":") == 0) return false;
  const auto minutes = cursor.Digits(2, 2);
  if (!minutes) return false;
  time.hours = *hours;
  time.minutes = *minutes;
  if (cursor.OneOf(":") != 0) {
    const auto seconds = cursor.Digits(2, 2);
    if (!seconds) return false;
    time.seconds = *seconds;
    if (cursor.OneOf(".,") != 0) {
      for (int unit = 100'000'000; const auto digit = cursor.Digits(1, 1); unit /= 10) {
        time.nanoseconds += *digit * unit;
      }
    }
  }
  cursor.SkipBlanks();
  if (cursor.OneOf("Zz") != 0) {
    time.offset_minutes = 0;
  } else if (const char sign = cursor.OneOf("+-")) {
    const auto offset_hours = cursor.Digits(2, 2);
    cursor.OneOf(":");
    const auto offset_minutes = cursor.Digits(0, 2);
    if (!offset_hours || *offset_hours > 14 || *offset_minutes > 59) return false;
    const int east = *offset_hours * 60 + *offset_minutes;
    time.offset_minutes = sign == '+' ? east : -east;
  }
  cursor.SkipBlanks();
  return cursor.done() && time.hours <= 23 && time.minutes <= 59 && time.seconds <= 60;
}

bool ReadDay(Cursor& cursor, int least_year_digits, std::chrono::year_month_day& day) {
  const auto year = cursor.Digits(least_year_digits, 4);
  const bool short_year = cursor.taken() == 2;
  if (!year || cursor.OneOf("/-") == 0) return false;
  const auto month = cursor.Digits(1, 2);
  if (!month || cursor.OneOf("/-") == 0) return false;
  const auto of_month = cursor.Digits(1, 2);
  if (!of_month) return false;
  // Two digits of the year: no such file is older than 1970.
  const int whole_year = !short_year ? *year : *year >= 70 ? 1900 + *year : 2000 + *year;
  day = std::chrono::year(whole_year) / *month / *of_month;
  return day.ok() && whole_year >= 1900;
}

std::optional<google::protobuf::Timestamp> Instant(std::chrono::year_month_day day,
                                                   const ClockTime& time) {
  std::int64_t seconds = 0;
  if (time.offset_minutes) {
    const auto days = std::chrono::sys_days(day).time_since_epoch().count();
    seconds = std::int64_t{86400} * days + time.hours * 3600 + time.minutes * 60 + time.seconds -
              *time.offset_minutes * 60;
  } else {
    std::tm local{};
    local.tm_year = static_cast<int>(day.year()) - 1900;
    local.tm_mon = static_cast<int>(static_cast<unsigned>(day.month())) - 1;
    local.tm_mday = static_cast<int>(static_cast<unsigned>(day.day()));
    local.tm_hour = time.hours;
    local.tm_min = time.minutes;
    local.tm_sec = time.seconds;
    local.tm_isdst = -1;
    seconds = std::mktime(&local);
    if (seconds == -1) return {};
  }
  google::protobuf::Timestamp instant;
  instant.set_seconds(seconds);
  instant.set_nanos(time.nanoseconds);
  return instant;
}

// 4.24: ##DATE= YY/MM/DD and ##TIME= HH:MM:SS.
std::optional<google::protobuf::Timestamp> ParseDateAndTime(const std::string& date,
                                                            const std::string& clock) {
  Cursor day_cursor(date);
  std::chrono::year_month_day day;
  if (!ReadDay(day_cursor, 2, day) || !day_cursor.done()) return {};
  ClockTime time;
  Cursor clock_cursor(clock);
  if (!ReadClock(clock_cursor, time)) return {};
  return Instant(day, time);
}

}  // namespace

std::optional<google::protobuf::Timestamp> ParseLongDate(std::string_view text) {
  Cursor cursor(text);
  std::chrono::year_month_day day;
  if (!ReadDay(cursor, 4, day)) return {};
  ClockTime time;
  if (cursor.OneOf("T") == 0) cursor.SkipBlanks();
  if (!cursor.done() && !ReadClock(cursor, time)) return {};
  return Instant(day, time);
}

std::string NucleusName(std::string_view text) {
  std::string digits;
  std::string letters;
  for (char c : text) {
    if (c == '^' || c == ' ' || c == '-' || c == '{' || c == '}') continue;
    if (std::isdigit(static_cast<unsigned char>(c))) {
      digits += c;
    } else if (std::isalpha(static_cast<unsigned char>(c))) {
      letters += static_cast<char>(letters.empty() ? std::toupper(static_cast<unsigned char>(c))
                                                   : std::tolower(static_cast<unsigned char>(c)));
    } else {
      return std::string(text);
    }
  }
  const bool known =
      !digits.empty() && digits.size() <= 3 && !letters.empty() && letters.size() <= 2;
  return known ? digits + letters : std::string(text);
}

void ReadFacts(const Block& block, Recording& recording) {
  v1::Snapshot& snapshot = recording.snapshot;
  recording.title = TextOf(block.Find("TITLE"));
  recording.solvent = TextOf(block.Find(".SOLVENTNAME"));
  snapshot.set_sample(TextOf(block.Find("SAMPLEDESCRIPTION")));
  snapshot.set_instrument(TextOf(block.Find("SPECTROMETERDATASYSTEM")));
  snapshot.set_nucleus(NucleusName(TextOf(block.Find(".OBSERVENUCLEUS"))));

  const Record* frequency_record = block.Find(".OBSERVEFREQUENCY");
  const std::optional<double> frequency = NumberOf(frequency_record);
  // From the earth's field (kHz) to what no magnet reaches.
  if (frequency && (*frequency < 1e-4 || *frequency > 1e4)) {
    Fail(frequency_record->line, "an observe frequency of " + Printed(*frequency) +
                                     " MHz cannot be: the standard wants it in MHz; correct it");
  }
  snapshot.set_observe_frequency_mhz(frequency.value_or(0));
  snapshot.set_scans_done(CountOf(block.Find(".AVERAGES")).value_or(0));

  std::optional<google::protobuf::Timestamp> recorded_at =
      ParseLongDate(TextOf(block.Find("LONGDATE")));
  if (!recorded_at) {
    recorded_at = ParseDateAndTime(TextOf(block.Find("DATE")), TextOf(block.Find("TIME")));
  }
  if (recorded_at) *snapshot.mutable_recorded_at() = *recorded_at;
}

std::optional<ShiftReference> ReadShiftReference(const Block& block) {
  const Record* record = block.Find(".SHIFTREFERENCE");
  if (record == nullptr) return {};
  // The name of the compound may hold commas itself, so count from the end.
  std::vector<std::string> columns = ColumnsOf(*record);
  if (columns.size() < 4) return {};
  std::string& shift_text = columns.back();
  if (!shift_text.empty() && shift_text.back() == ')') shift_text.pop_back();
  const std::optional<double> point = ParseNumber(columns[columns.size() - 2]);
  const std::optional<double> shift = ParseNumber(Bare(shift_text));
  if (!point || !shift) return {};
  return ShiftReference{*point, *shift};
}

}  // namespace lastscan::formats::jcamp
