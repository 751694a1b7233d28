// Writes JCAMP-DX: an FID as NTUPLES with a real and an imaginary page, a spectrum
// as XYDATA in HZ.
#include <algorithm>
#include <chrono>
#include <cmath>
#include <cstdint>
#include <cstdio>
#include <limits>
#include <ostream>
#include <stdexcept>
#include <utility>

#include "engine/advice/cautions.h"
#include "formats/jcamp/label_value.h"
#include "formats/jcamp/ordinate_writer.h"
#include "formats/jcamp_dx.h"

namespace lastscan::formats {
namespace {

using jcamp::Printed;

// The largest ordinate that is written, a whole number of 31 bits.
constexpr double kLargest = 2147483647.0;

// The factor that makes whole numbers of at most 31 bits: 1 when they are so
// already, else the power of two that leaves the largest 30 bits or more.
double CommonFactor(const std::vector<double>& samples) {
  double largest = 0;
  bool whole = true;
  for (double sample : samples) {
    if (!std::isfinite(sample)) throw std::invalid_argument("a sample is not a finite number");
    largest = std::max(largest, std::abs(sample));
    whole = whole && sample == std::floor(sample);
  }
  if (largest == 0 || (whole && largest <= kLargest)) return 1;
  int exponent = 0;
  std::frexp(largest, &exponent);  // largest < 2^exponent
  return std::max(std::ldexp(1.0, exponent - 31), std::numeric_limits<double>::denorm_min());
}

std::vector<std::int64_t> Scaled(const std::vector<double>& samples, double factor,
                                 std::size_t offset, std::size_t stride, double sign) {
  std::vector<std::int64_t> ordinates;
  ordinates.reserve(samples.size() / stride);
  for (std::size_t i = offset; i < samples.size(); i += stride) {
    // Rounding must not lift the largest to 32 bits.
    const double scaled = std::clamp(sign * samples[i] / factor, -kLargest, kLargest);
    ordinates.push_back(std::llround(scaled));
  }
  return ordinates;
}

// Text that stays in its line and does not begin a comment.
std::string OneLine(std::string_view text) {
  std::string line;
  for (char c : text) {
    if (c == '$' && !line.empty() && line.back() == '$') line += ' ';
    line += static_cast<unsigned char>(c) < 0x20 || c == 0x7F ? ' ' : c;
  }
  return line;
}

void WriteText(std::ostream& out, const char* label, const std::string& text) {
  if (!text.empty()) out << "##" << label << "= " << OneLine(text) << '\n';
}

// "2027/01/31 07:30:00.250 +0000", the standard's order of date, time and offset.
std::string LongDate(const google::protobuf::Timestamp& instant) {
  using std::chrono::days;
  const std::chrono::sys_seconds time{std::chrono::seconds(instant.seconds())};
  const auto midnight = std::chrono::floor<days>(time);
  const std::chrono::year_month_day day(midnight);
  const std::chrono::hh_mm_ss clock(time - midnight);
  char text[64];
  std::snprintf(text, sizeof text, "%04d/%02u/%02u %02d:%02d:%02d.%09d +0000",
                static_cast<int>(day.year()), static_cast<unsigned>(day.month()),
                static_cast<unsigned>(day.day()), static_cast<int>(clock.hours().count()),
                static_cast<int>(clock.minutes().count()),
                static_cast<int>(clock.seconds().count()), instant.nanos());
  return text;
}

void WriteHead(std::ostream& out, const Recording& recording, bool fid) {
  const v1::Snapshot& snapshot = recording.snapshot;
  out << "##TITLE= " << OneLine(recording.title.empty() ? snapshot.sample() : recording.title)
      << "\n##JCAMP-DX= 6.0\n"
      << engine::CautionsAsComments("$$ ") << "##DATA TYPE= " << (fid ? "NMR FID" : "NMR SPECTRUM")
      << "\n##DATA CLASS= " << (fid ? "NTUPLES" : "XYDATA") << "\n##NUMDIM= 1\n"
      << "##ORIGIN= Lastscan\n##OWNER= not stated\n";
  WriteText(out, "SAMPLE DESCRIPTION", snapshot.sample());
  WriteText(out, "SPECTROMETER/DATA SYSTEM", snapshot.instrument());
  if (snapshot.has_recorded_at()) {
    out << "##LONG DATE= " << LongDate(snapshot.recorded_at()) << '\n';
  }
  out << "##.OBSERVE FREQUENCY= " << Printed(snapshot.observe_frequency_mhz()) << '\n';
  if (!snapshot.nucleus().empty()) WriteText(out, ".OBSERVE NUCLEUS", "^" + snapshot.nucleus());
  if (snapshot.scans_done() > 0) out << "##.AVERAGES= " << snapshot.scans_done() << '\n';
  WriteText(out, ".SOLVENT NAME", recording.solvent);
}

void WriteReference(std::ostream& out, const Recording& recording, double shift_ppm) {
  const std::string compound = recording.solvent.empty() ? "not stated" : recording.solvent;
  out << "##.SHIFT REFERENCE= INTERNAL, " << OneLine(compound) << ", 1, " << Printed(shift_ppm)
      << '\n';
}

// The span of the values, for the records that ask for it.
std::pair<double, double> Span(const std::vector<std::int64_t>& ordinates, double factor) {
  const auto [low, high] = std::minmax_element(ordinates.begin(), ordinates.end());
  return {static_cast<double>(*low) * factor, static_cast<double>(*high) * factor};
}

void WriteFid(std::ostream& out, const Recording& recording, TableForm form) {
  const v1::Snapshot& snapshot = recording.snapshot;
  const double width = snapshot.spectral_width_hz();
  out << "##.ACQUISITION MODE= SIMULTANEOUS\n";
  if (recording.has_centre_shift) {
    WriteReference(out, recording,
                   snapshot.centre_shift_ppm() + 0.5 * width / snapshot.observe_frequency_mhz());
  }
  const double factor = CommonFactor(recording.samples);
  const auto real = Scaled(recording.samples, factor, 0, 2, 1);
  const auto imaginary = Scaled(recording.samples, factor, 1, 2, snapshot.reversed() ? -1 : 1);
  const auto [real_low, real_high] = Span(real, factor);
  const auto [imaginary_low, imaginary_high] = Span(imaginary, factor);
  const std::string points = std::to_string(real.size());
  const double last_x = static_cast<double>(real.size() - 1) / width;
  const auto row = [&](const char* label, const std::string& x, const std::string& r,
                       const std::string& i, const char* page) {
    out << "##" << label << "= " << x << ", " << r << ", " << i << ", " << page << '\n';
  };
  const auto value = [&](std::int64_t ordinate) {
    return Printed(static_cast<double>(ordinate) * factor);
  };
  const std::string asdf = form == TableForm::kDifdup ? "ASDF" : "AFFN";
  out << "##NTUPLES= NMR FID\n";
  row("VAR_NAME", "TIME", "FID/REAL", "FID/IMAG", "PAGE NUMBER");
  row("SYMBOL", "X", "R", "I", "N");
  row("VAR_TYPE", "INDEPENDENT", "DEPENDENT", "DEPENDENT", "PAGE");
  row("VAR_FORM", "AFFN", asdf, asdf, "AFFN");
  row("VAR_DIM", points, points, points, "2");
  row("UNITS", "SECONDS", "ARBITRARY UNITS", "ARBITRARY UNITS", "");
  row("FIRST", "0", value(real.front()), value(imaginary.front()), "1");
  row("LAST", Printed(last_x), value(real.back()), value(imaginary.back()), "2");
  row("MIN", "0", Printed(real_low), Printed(imaginary_low), "1");
  row("MAX", Printed(last_x), Printed(real_high), Printed(imaginary_high), "2");
  row("FACTOR", Printed(1 / width), Printed(factor), Printed(factor), "1");
  // The abscissae are the numbers of the points; their factor is the spacing.
  const jcamp::PrintedAbscissa numbers{0, 1, 0};
  out << "##PAGE= N=1\n##DATA TABLE= (X++(R..R)), XYDATA\n";
  jcamp::WriteOrdinates(out, real, numbers, form);
  out << "##PAGE= N=2\n##DATA TABLE= (X++(I..I)), XYDATA\n";
  jcamp::WriteOrdinates(out, imaginary, numbers, form);
  out << "##END NTUPLES= NMR FID\n";
}

void WriteSpectrum(std::ostream& out, const Recording& recording, TableForm form) {
  const v1::Snapshot& snapshot = recording.snapshot;
  const double points = snapshot.points();
  const double sign = snapshot.reversed() ? 1 : -1;
  const double spacing = sign * snapshot.spectral_width_hz() / points;
  const double centre = snapshot.centre_shift_ppm() * snapshot.observe_frequency_mhz();
  const double first = centre - 0.5 * (points - 1) * spacing;
  const double last = centre + 0.5 * (points - 1) * spacing;
  if (recording.has_centre_shift) {
    WriteReference(out, recording, first / snapshot.observe_frequency_mhz());
  }
  const double factor = CommonFactor(recording.samples);
  const auto ordinates = Scaled(recording.samples, factor, 0, 1, 1);
  const auto [low, high] = Span(ordinates, factor);
  // Enough decimals to tell neighbouring points apart.
  const int decimals =
      std::clamp(1 - static_cast<int>(std::floor(std::log10(std::abs(spacing)))), 0, 12);
  out << "##XUNITS= HZ\n##YUNITS= ARBITRARY UNITS\n##FIRSTX= " << Printed(first)
      << "\n##LASTX= " << Printed(last) << "\n##DELTAX= " << Printed(spacing)
      << "\n##XFACTOR= 1\n##YFACTOR= " << Printed(factor)
      << "\n##FIRSTY= " << Printed(static_cast<double>(ordinates.front()) * factor)
      << "\n##MINY= " << Printed(low) << "\n##MAXY= " << Printed(high)
      << "\n##NPOINTS= " << ordinates.size() << "\n##XYDATA= (X++(Y..Y))\n";
  jcamp::WriteOrdinates(out, ordinates, {first, spacing, decimals}, form);
}

void CheckWritable(const Recording& recording) {
  const v1::Snapshot& snapshot = recording.snapshot;
  const bool fid = snapshot.domain() == v1::FID;
  const std::size_t values = fid ? 2 * std::size_t{snapshot.points()} : snapshot.points();
  if (!fid && snapshot.domain() != v1::SPECTRUM) {
    throw std::invalid_argument("a recording without a domain cannot be written");
  }
  if (snapshot.points() < 2 || recording.samples.size() != values) {
    throw std::invalid_argument("a recording of " + std::to_string(snapshot.points()) +
                                " points with " + std::to_string(recording.samples.size()) +
                                " samples cannot be written");
  }
  for (double needed : {snapshot.spectral_width_hz(), snapshot.observe_frequency_mhz()}) {
    if (!(needed > 0) || !std::isfinite(needed)) {
      throw std::invalid_argument(
          "a recording without spectral width or observe frequency cannot be written");
    }
  }
  // An axis whose points a double cannot tell apart would not be read again.
  const double spacing =
      fid ? 1 / snapshot.spectral_width_hz() : snapshot.spectral_width_hz() / snapshot.points();
  const double furthest =
      fid ? spacing * snapshot.points()
          : std::abs(snapshot.centre_shift_ppm()) * snapshot.observe_frequency_mhz() +
                snapshot.spectral_width_hz();
  if (!std::isfinite(furthest) || spacing < 1e-12 * furthest) {
    throw std::invalid_argument("a recording with such a width and centre cannot be written");
  }
}

}  // namespace

void WriteJcampDx(std::ostream& out, const Recording& recording, TableForm form) {
  CheckWritable(recording);
  const bool fid = recording.snapshot.domain() == v1::FID;
  WriteHead(out, recording, fid);
  if (fid) {
    WriteFid(out, recording, form);
  } else {
    WriteSpectrum(out, recording, form);
  }
  // Last of all: a reader takes a file without it for one still being written.
  out << "##END=\n";
}

}  // namespace lastscan::formats
