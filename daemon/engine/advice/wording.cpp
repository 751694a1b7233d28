#include "engine/advice/wording.h"

#include <cmath>
#include <cstdint>
#include <cstdio>
#include <ctime>

namespace lastscan::engine {

std::string Rounded(double value) {
  char text[48];
  const double size = std::abs(value);
  const char* format = size < 10 ? "%.2f" : size < 100 ? "%.1f" : "%.0f";
  std::snprintf(text, sizeof text, format, value);
  return text;
}

std::string Scans(double scans) {
  if (!(scans < 1e12)) return "more than a million million";
  const std::string digits = std::to_string(static_cast<std::uint64_t>(std::llround(scans)));
  std::string grouped;
  for (std::size_t i = 0; i < digits.size(); ++i) {
    if (i > 0 && (digits.size() - i) % 3 == 0) grouped.push_back(',');
    grouped.push_back(digits[i]);
  }
  return grouped;
}

std::string Percent(double share) {
  if (share > 0 && share < 0.001) return "less than 0.1 %";
  char text[48];
  std::snprintf(text, sizeof text, share < 0.1 ? "%.1f %%" : "%.0f %%", 100 * share);
  return text;
}

std::string Duration(double seconds) {
  const auto whole = std::llround(std::min(std::max(seconds, 0.0), 1e15));
  const long long days = whole / 86400;
  const long long hours = whole / 3600 % 24;
  const long long minutes = whole / 60 % 60;
  char text[64];
  if (days > 0) {
    std::snprintf(text, sizeof text, "%lld d %lld h", days, hours);
  } else if (hours > 0) {
    std::snprintf(text, sizeof text, "%lld h %lld min", hours, minutes);
  } else if (minutes > 0) {
    std::snprintf(text, sizeof text, "%lld min", minutes);
  } else {
    std::snprintf(text, sizeof text, "%lld s", whole);
  }
  return text;
}

std::string ClockTime(double unix_seconds) {
  const auto time = static_cast<std::time_t>(unix_seconds);
  std::tm broken{};
  gmtime_r(&time, &broken);
  char text[40];
  std::strftime(text, sizeof text, "%Y-%m-%d %H:%M UTC", &broken);
  return text;
}

std::string Shift(double ppm) {
  char text[40];
  std::snprintf(text, sizeof text, "%.2f ppm", ppm);
  return text;
}

std::string ConventionInWords(v1::Convention convention) {
  switch (convention) {
    case v1::HEIGHT_OVER_TWICE_RMS:
      return "height over twice the rms noise";
    case v1::PEAK_TO_PEAK:
      return "2.5 times height over peak-to-peak noise";
    default:
      return "height over rms noise";
  }
}

}  // namespace lastscan::engine
