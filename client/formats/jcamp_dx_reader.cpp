// Reads JCAMP-DX: picks the block, decodes its tables, and turns its axis and
// shift reference into the facts of a snapshot.
#include <cmath>
#include <optional>

#include "formats/jcamp/label_value.h"
#include "formats/jcamp/labelled_records.h"
#include "formats/jcamp/nmr_facts.h"
#include "formats/jcamp/ntuples.h"
#include "formats/jcamp/ordinate_table.h"
#include "formats/jcamp_dx.h"

namespace lastscan::formats {
namespace {

using jcamp::Abscissa;
using jcamp::Block;
using jcamp::Fail;
using jcamp::Page;
using jcamp::Printed;
using jcamp::Record;
using jcamp::Variable;

// Why a block is not what we read; empty when it is.
std::string WhyNot(const Block& block) {
  const Record* type_record = block.Find("DATATYPE");
  const std::string type = jcamp::Comparable(jcamp::TextOf(type_record));
  if (type == "LINK") return "it only links other blocks";
  if (type.empty()) return "no ##DATA TYPE= says what it holds";
  const std::string shown = jcamp::Shown(jcamp::TextOf(type_record));
  const std::optional<std::size_t> dimensions = jcamp::CountOf(block.Find("NUMDIM"));
  const bool many =
      type.size() > 2 && type[1] == 'D' && (type[0] == 'N' || (type[0] >= '2' && type[0] <= '9'));
  if (many || dimensions.value_or(1) > 1 || jcamp::HasSeveralAxes(block)) {
    return "it holds data of two or more dimensions (" + shown + ")";
  }
  if (type != "NMRFID" && type != "NMRSPECTRUM") return "it holds " + shown;
  if (block.Find("NTUPLES") == nullptr && block.Find("XYDATA") == nullptr) {
    return "its " + shown + " has neither ##NTUPLES= nor ##XYDATA=";
  }
  return {};
}

const Block& Choose(const std::vector<Block>& blocks) {
  std::string reasons;
  for (const Block& block : blocks) {
    const std::string reason = WhyNot(block);
    if (reason.empty()) return block;
    const Record* type = block.Find("DATATYPE");
    const bool link = type != nullptr && jcamp::Comparable(jcamp::TextOf(type)) == "LINK";
    if (reasons.empty() && !link) {
      reasons = "the block in line " + std::to_string(block.line) + ": " + reason;
    }
  }
  if (reasons.empty()) reasons = "its only block links to others that are not there";
  throw Unreadable("no one-dimensional NMR FID or spectrum (" + reasons +
                   "): export the FID or the spectrum of one accumulation");
}

// The version matters only in so far as another standard must not be mistaken for this one.
void CheckVersion(const Block& block) {
  const Record* record = block.Find("JCAMPDX");
  if (record == nullptr) return;
  const std::string text = jcamp::TextOf(record);
  const std::optional<double> version = jcamp::ParseNumber(text.substr(0, text.find(' ')));
  if (!version || *version < 4 || *version >= 7) {
    Fail(record->line, "JCAMP-DX version " + jcamp::Shown(text) +
                           ": Lastscan reads 4.24 to 6.0; export the file in one of these");
  }
}

// A count of points that we agree to hold and can make a spacing of.
std::size_t CheckedPoints(std::size_t points, std::size_t line) {
  if (points < 2 || points > kMostPointsInTable) {
    Fail(line, std::to_string(points) + " points are promised: Lastscan reads 2 to " +
                   std::to_string(kMostPointsInTable) + "; export the file again");
  }
  return points;
}

Abscissa AbscissaOf(const Page& page) {
  const Variable& x = page.abscissa;
  if (!x.points || !page.ordinate.points || !x.first || !x.last) {
    Fail(page.line,
         "##VAR_DIM=, ##FIRST= or ##LAST= is missing for the variables of this table: "
         "export the file again");
  }
  if (*x.points != *page.ordinate.points) {
    Fail(page.line, "##VAR_DIM= promises " + std::to_string(*x.points) + " abscissae but " +
                        std::to_string(*page.ordinate.points) +
                        " ordinates: export the file again");
  }
  Abscissa abscissa{*x.first, *x.last, x.factor, CheckedPoints(*x.points, page.line)};
  if (abscissa.first == abscissa.last || !std::isfinite(abscissa.spacing())) {
    Fail(page.line,
         "##FIRST= and ##LAST= of the abscissa leave no distance between its points: "
         "export the file again");
  }
  return abscissa;
}

// The ordinates of a page as they are meant, its factor applied.
std::vector<double> ReadTable(const Page& page, const Abscissa& abscissa) {
  std::vector<double> values = jcamp::DecodeOrdinates(page.table, page.table_line, abscissa);
  std::size_t point = 0;
  for (double& value : values) {
    ++point;
    value *= page.ordinate.factor;
    if (!std::isfinite(value)) {
      Fail(page.line, "point " + std::to_string(point) +
                          " of this table is too large for a number: export the file again");
    }
  }
  return values;
}

bool Contains(const std::string& text, const char* part) { return text.find(part) != text.npos; }

// The one page with that quantity; nullptr if there is none. A second page of it
// is another experiment of an array.
const Page* Single(const std::vector<Page>& pages, const char* part, const char* symbol) {
  const Page* found = nullptr;
  for (const Page& page : pages) {
    if (!Contains(page.ordinate.name, part) && page.ordinate.symbol != symbol) continue;
    if (found != nullptr) {
      Fail(page.line, "a second page of " + jcamp::Shown(page.ordinate.symbol) +
                          ": the file holds several FIDs or spectra; export each by itself");
    }
    found = &page;
  }
  return found;
}

// A reading of the axis of a spectrum.
void PlaceSpectrum(const Abscissa& abscissa, const std::string& unit, std::size_t line,
                   const Block& block, Recording& recording) {
  v1::Snapshot& snapshot = recording.snapshot;
  const double frequency = snapshot.observe_frequency_mhz();
  if (unit != "HZ" && unit != "PPM") {
    Fail(line, "an abscissa in " + jcamp::Shown(unit) +
                   ": Lastscan reads spectra in HZ or PPM; export the file in one of these");
  }
  const bool hertz = unit == "HZ";
  snapshot.set_reversed(abscissa.spacing() > 0);
  if (frequency == 0) {
    if (!hertz) {
      Fail(line,
           "an abscissa in PPM without .OBSERVE FREQUENCY says no width in Hz: add the line "
           "'##.OBSERVE FREQUENCY= ' with the frequency in MHz, or export the file again");
    }
    snapshot.set_spectral_width_hz(static_cast<double>(abscissa.points) *
                                   std::abs(abscissa.spacing()));
    return;
  }
  const double ppm_per_unit = hertz ? 1 / frequency : 1;
  const double spacing_ppm = abscissa.spacing() * ppm_per_unit;
  const double middle = 0.5 * static_cast<double>(abscissa.points - 1);
  double centre = 0.5 * (abscissa.first + abscissa.last) * ppm_per_unit;
  // In Hz the zero may lie anywhere; the reference tells where.
  if (const auto reference = jcamp::ReadShiftReference(block); hertz && reference) {
    centre = reference->shift_ppm + (middle - (reference->point - 1)) * spacing_ppm;
  }
  snapshot.set_spectral_width_hz(static_cast<double>(abscissa.points) * std::abs(spacing_ppm) *
                                 frequency);
  snapshot.set_centre_shift_ppm(centre);
  recording.has_centre_shift = true;
}

void ReadFid(const Block& block, Recording& recording) {
  v1::Snapshot& snapshot = recording.snapshot;
  snapshot.set_domain(v1::FID);
  if (block.Find("NTUPLES") == nullptr) {
    throw Unreadable(
        "the FID has no imaginary part: export it with real and imaginary pages (##NTUPLES=)");
  }
  const std::vector<Page> pages = jcamp::ReadPages(block);
  const Page* real = Single(pages, "REAL", "R");
  const Page* imaginary = Single(pages, "IMAG", "I");
  if (real == nullptr || imaginary == nullptr) {
    throw Unreadable(std::string("the FID has no page of its ") +
                     (real == nullptr ? "real" : "imaginary") +
                     " part: export it with real and imaginary pages");
  }
  const Abscissa abscissa = AbscissaOf(*real);
  const Abscissa other = AbscissaOf(*imaginary);
  if (other.points != abscissa.points || real->abscissa.symbol != imaginary->abscissa.symbol) {
    Fail(imaginary->line,
         "the imaginary page differs from the real one in its points: export "
         "the file again");
  }
  const std::string& unit = real->abscissa.unit;
  if (unit != "SECONDS" || abscissa.spacing() <= 0) {
    Fail(real->line, "an FID along " + jcamp::Shown(unit) + " from " + Printed(abscissa.first) +
                         " to " + Printed(abscissa.last) +
                         ": Lastscan reads FIDs along rising SECONDS; export the file so");
  }
  const std::vector<double> real_values = ReadTable(*real, abscissa);
  const std::vector<double> imaginary_values = ReadTable(*imaginary, other);
  recording.samples.resize(2 * abscissa.points);
  for (std::size_t i = 0; i < abscissa.points; ++i) {
    recording.samples[2 * i] = real_values[i];
    recording.samples[2 * i + 1] = imaginary_values[i];
  }
  snapshot.set_points(static_cast<std::uint32_t>(abscissa.points));
  const double width = 1 / abscissa.spacing();
  snapshot.set_spectral_width_hz(width);
  const auto reference = jcamp::ReadShiftReference(block);
  if (reference && snapshot.observe_frequency_mhz() > 0) {
    // Point 1 of the would-be spectrum lies half its width above zero frequency.
    const double below = 0.5 - (reference->point - 1) / static_cast<double>(abscissa.points);
    snapshot.set_centre_shift_ppm(reference->shift_ppm -
                                  below * width / snapshot.observe_frequency_mhz());
    recording.has_centre_shift = true;
  }
}

// NTUPLES: the real page, or the only page there is.
void ReadSpectrumPages(const Block& block, Recording& recording) {
  const std::vector<Page> pages = jcamp::ReadPages(block);
  const Page* page = Single(pages, "REAL", "R");
  if (page == nullptr && pages.size() == 1) page = &pages.front();
  if (page == nullptr) {
    throw Unreadable("the spectrum has " + std::to_string(pages.size()) +
                     " pages and none is named as its real part: export it as XYDATA");
  }
  const Abscissa abscissa = AbscissaOf(*page);
  PlaceSpectrum(abscissa, page->abscissa.unit, page->line, block, recording);
  recording.samples = ReadTable(*page, abscissa);
}

double Required(const Block& block, const char* label, const char* shown, std::size_t line) {
  const std::optional<double> number = jcamp::NumberOf(block.Find(label));
  if (!number) {
    Fail(line, std::string("##") + shown + "= is missing for this table: export the file again");
  }
  return *number;
}

// XYDATA: one table, its axis told by labels of their own.
void ReadSpectrumTable(const Block& block, Recording& recording) {
  const Record& table = *block.Find("XYDATA");
  const jcamp::TableHead head = jcamp::ReadTableHead(table);
  const std::size_t line = table.line;
  Page page;
  page.line = line;
  page.table = head.table;
  page.table_line = head.table_line;
  page.abscissa.unit = jcamp::Comparable(jcamp::TextOf(block.Find("XUNITS")));
  page.abscissa.first = Required(block, "FIRSTX", "FIRSTX", line);
  page.abscissa.last = Required(block, "LASTX", "LASTX", line);
  page.abscissa.factor = jcamp::NumberOf(block.Find("XFACTOR")).value_or(1);
  page.ordinate.factor = jcamp::NumberOf(block.Find("YFACTOR")).value_or(1);
  const std::optional<std::size_t> points = jcamp::CountOf(block.Find("NPOINTS"));
  if (!points) Required(block, "NPOINTS", "NPOINTS", line);
  page.abscissa.points = page.ordinate.points = points;
  const Abscissa abscissa = AbscissaOf(page);
  const double spacing = jcamp::NumberOf(block.Find("DELTAX")).value_or(abscissa.spacing());
  // Some state DELTAX without its sign, many round it.
  if (std::abs(std::abs(spacing) - std::abs(abscissa.spacing())) >
      0.01 * std::abs(abscissa.spacing())) {
    Fail(line, "##DELTAX= says " + Printed(spacing) + " between points, ##FIRSTX=, ##LASTX= and " +
                   "##NPOINTS= say " + Printed(abscissa.spacing()) + ": export the file again");
  }
  PlaceSpectrum(abscissa, page.abscissa.unit, line, block, recording);
  recording.samples = ReadTable(page, abscissa);
}

// Numbers that are each possible can still make an axis that is not.
void CheckAxis(const v1::Snapshot& snapshot) {
  const double width = snapshot.spectral_width_hz();
  if (!(width > 0) || !std::isfinite(width) || !std::isfinite(snapshot.centre_shift_ppm())) {
    throw Unreadable("its axis makes a spectral width of " + Printed(width) +
                     " Hz around a shift of " + Printed(snapshot.centre_shift_ppm()) +
                     " ppm, which cannot be: export the file again");
  }
}

Recording Read(std::string_view text) {
  constexpr std::string_view kByteOrderMark = "\xEF\xBB\xBF";
  if (text.substr(0, 3) == kByteOrderMark) text.remove_prefix(3);
  const std::vector<Block> blocks = jcamp::SplitIntoBlocks(text);
  const Block& block = Choose(blocks);
  CheckVersion(block);
  Recording recording;
  jcamp::ReadFacts(block, recording);
  recording.snapshot.set_encoding(v1::FLOAT64);
  if (jcamp::Comparable(jcamp::TextOf(block.Find("DATATYPE"))) == "NMRFID") {
    ReadFid(block, recording);
    CheckAxis(recording.snapshot);
    return recording;
  }
  recording.snapshot.set_domain(v1::SPECTRUM);
  if (block.Find("NTUPLES") != nullptr) {
    ReadSpectrumPages(block, recording);
  } else {
    ReadSpectrumTable(block, recording);
  }
  recording.snapshot.set_points(static_cast<std::uint32_t>(recording.samples.size()));
  CheckAxis(recording.snapshot);
  return recording;
}

}  // namespace

bool LooksLikeJcampDx(std::string_view text) {
  if (text.substr(0, 3) == "\xEF\xBB\xBF") text.remove_prefix(3);
  jcamp::Lines lines(text);
  while (lines.Next()) {
    const std::string_view line = jcamp::Bare(lines.line());
    if (line.empty()) continue;
    return line.substr(0, 2) == "##" &&
           jcamp::Comparable(line.substr(0, line.find('='))) == "##TITLE";
  }
  return false;
}

Recording ReadJcampDx(std::string_view text, const std::string& name) {
  try {
    return Read(text);
  } catch (const Unreadable& error) {
    throw Unreadable(name + ": " + error.what());
  }
}

}  // namespace lastscan::formats
