// The progress figure on a terminal: the law in braille dots (eight to a
// character), everything else in characters of its own shape.
#include <algorithm>
#include <array>
#include <cmath>
#include <string>
#include <vector>

#include "drawing/escape.h"
#include "drawing/progress_figure.h"
#include "drawing/progress_layout.h"
#include "drawing/words.h"

namespace lastscan::drawing {
namespace {

constexpr int kLeastRows = 10;
constexpr int kLeastColumns = 36;
constexpr int kRowsAround = 5;  // title, axis, tick labels, two lines of legend

struct Glyphs {
  const char* reading;
  const char* limits;
  const char* below;  // upper limit of an unconfirmed line
  const char* goal;
  const char* event;
  const char* planned_end;
  const char* law;  // in the legend; in the figure braille where there is any
  const char* corner;
  const char* across;
  const char* up;
};
constexpr Glyphs kUnicode = {"●", "│", "▽", "─", "┊", "◆", "⠒", "└", "─", "│"};
constexpr Glyphs kAscii = {"o", "|", "v", "-", ":", "#", ".", "+", "-", "|"};

// One code point as UTF-8; braille patterns only (U+2800 to U+28FF).
std::string Braille(unsigned dots) {
  return {'\xE2', static_cast<char>(0xA0 + (dots >> 6)), static_cast<char>(0x80 + (dots & 0x3F))};
}

// A grid of characters with a finer grid of dots below it.
class Canvas {
 public:
  Canvas(int columns, int rows, bool plain)
      : columns_(columns),
        rows_(rows),
        plain_(plain),
        cells_(static_cast<std::size_t>(columns * rows)),
        dots_(cells_.size(), 0) {}

  int columns() const { return columns_; }
  int rows() const { return rows_; }
  // Cell of a place 0..1 across or up; -1 when it is outside.
  int ColumnAt(double across) const { return Cell(across, columns_); }
  int RowAt(double up) const {
    const int row = Cell(up, rows_);
    return row < 0 ? -1 : rows_ - 1 - row;
  }

  void Put(int column, int row, const char* glyph) {
    if (column >= 0 && column < columns_ && row >= 0 && row < rows_) {
      cells_[Index(column, row)] = glyph;
    }
  }

  // A straight line in places 0..1; what leaves the canvas is left out.
  // `sparse`: every third dot only.
  void Line(double x0, double y0, double x1, double y1, bool sparse) {
    const int steps = 4 * std::max(2 * columns_, 4 * rows_);
    for (int i = 0; i <= steps; ++i) {
      const double share = static_cast<double>(i) / steps;
      const int x = Cell(x0 + share * (x1 - x0), 2 * columns_);
      const int y = Cell(y0 + share * (y1 - y0), 4 * rows_);
      if (x >= 0 && y >= 0 && (!sparse || x % 3 == 0)) {
        Dot(x, 4 * rows_ - 1 - y);
      }
    }
  }

  std::string Row(int row) const {
    std::string text;
    for (int column = 0; column < columns_; ++column) {
      const std::size_t at = Index(column, row);
      if (!cells_[at].empty()) {
        text += cells_[at];
      } else if (dots_[at] == 0) {
        text += ' ';
      } else {
        text += plain_ ? "." : Braille(dots_[at]);
      }
    }
    return text;
  }

 private:
  static int Cell(double place, int count) {
    if (!(place >= 0 && place <= 1)) {
      return -1;
    }
    return std::min(count - 1, static_cast<int>(place * count));
  }
  std::size_t Index(int column, int row) const {
    return static_cast<std::size_t>(row * columns_ + column);
  }
  void Dot(int x, int y) {
    // Bits of a braille pattern, by row and column of its dots.
    constexpr std::array<std::array<unsigned, 2>, 4> kBits = {
        {{0x01, 0x08}, {0x02, 0x10}, {0x04, 0x20}, {0x40, 0x80}}};
    dots_[Index(x / 2, y / 4)] |=
        kBits[static_cast<std::size_t>(y % 4)][static_cast<std::size_t>(x % 2)];
  }

  int columns_;
  int rows_;
  bool plain_;
  std::vector<std::string> cells_;
  std::vector<unsigned> dots_;
};

void DrawLaw(const ProgressLayout& layout, Canvas* canvas) {
  if (!layout.law) {
    return;
  }
  const double here = layout.Across(layout.law->scans);
  const auto ray = [&](double signal, bool sparse) {
    canvas->Line(0, 0, 1, layout.Up(signal) / here, sparse);
  };
  ray(layout.law->lower, true);
  ray(layout.law->upper, true);
  ray(layout.law->estimate, false);
}

void DrawReading(const ProgressLayout& layout, const Reading& reading, const char* glyph,
                 const Glyphs& glyphs, Canvas* canvas) {
  const int column = canvas->ColumnAt(layout.Across(reading.scans));
  if (!reading.confirmed) {
    canvas->Put(column, canvas->RowAt(layout.Up(reading.upper)), glyphs.below);
    return;
  }
  const int bottom = canvas->RowAt(std::clamp(layout.Up(reading.lower), 0.0, 1.0));
  const int top = canvas->RowAt(std::clamp(layout.Up(reading.upper), 0.0, 1.0));
  for (int row = top; row <= bottom; ++row) {
    canvas->Put(column, row, glyphs.limits);
  }
  canvas->Put(column, canvas->RowAt(layout.Up(reading.estimate)), glyph);
}

std::string TickLabels(const ProgressLayout& layout, const Canvas& canvas, int margin, int width) {
  std::string text;
  for (std::uint64_t tick : layout.scan_ticks) {
    const std::string label = std::to_string(tick);
    const int at = margin + canvas.ColumnAt(layout.Across(static_cast<double>(tick)));
    const int used = static_cast<int>(text.size());
    if ((used > 0 && at < used + 1) || at + static_cast<int>(label.size()) > width) {
      continue;
    }
    text.append(static_cast<std::size_t>(at - used), ' ').append(label);
  }
  constexpr std::string_view kName = "  scans";
  if (text.size() + kName.size() <= static_cast<std::size_t>(width)) {
    text.append(kName);
  }
  return text;
}

}  // namespace

std::string DrawForTerminal(const ProgressFigure& figure, int rows, const Style& style) {
  const int width = std::max(style.width, 1);
  if (rows < 1) {
    return {};
  }
  std::vector<std::string> lines;
  if (rows < kLeastRows || width < kLeastColumns) {
    lines.push_back(CutTo("(no room for the figure)", width));
    lines.resize(static_cast<std::size_t>(rows));
  } else {
    const ProgressLayout layout = LayOut(figure);
    const Glyphs& glyphs = style.plain ? kAscii : kUnicode;
    int label_columns = 0;
    for (double tick : layout.signal_ticks) {
      label_columns = std::max(label_columns, Columns(Brief(tick)));
    }
    const int margin = label_columns + 2;  // labels, a space, the axis
    Canvas canvas(width - margin, rows - kRowsAround, style.plain);

    DrawLaw(layout, &canvas);
    const int goal_row = layout.goal ? canvas.RowAt(layout.Up(*layout.goal)) : -1;
    for (int column = 0; goal_row >= 0 && column < canvas.columns(); ++column) {
      canvas.Put(column, goal_row, glyphs.goal);
    }
    for (const Event& event : layout.events) {
      const int column = canvas.ColumnAt(layout.Across(event.scans));
      for (int row = 1; row < canvas.rows(); ++row) {
        canvas.Put(column, row, glyphs.event);
      }
    }
    if (layout.planned_end) {
      DrawReading(layout, *layout.planned_end, glyphs.planned_end, glyphs, &canvas);
    }
    for (const Reading& reading : layout.readings) {
      DrawReading(layout, reading, glyphs.reading, glyphs, &canvas);
    }
    std::string events;
    for (const Event& event : layout.events) {
      // Two events in one column: the later letter stands, the legend says all.
      const std::string letter(1, event.letter);
      canvas.Put(canvas.ColumnAt(layout.Across(event.scans)), 0, letter.c_str());
      events += (events.empty() ? "" : "  ") + letter + " " + event.label;
    }

    lines.push_back("signal-to-noise");
    std::vector<std::string> labels(static_cast<std::size_t>(canvas.rows()));
    for (double tick : layout.signal_ticks) {
      if (const int row = canvas.RowAt(layout.Up(tick)); row >= 0) {
        labels[static_cast<std::size_t>(row)] = Brief(tick);
      }
    }
    for (int row = 0; row < canvas.rows(); ++row) {
      std::string label = labels[static_cast<std::size_t>(row)];
      label.insert(0, static_cast<std::size_t>(label_columns) - label.size(), ' ');
      lines.push_back(label + " " + glyphs.up + canvas.Row(row));
    }
    std::string axis(static_cast<std::size_t>(label_columns + 1), ' ');
    axis += glyphs.corner;
    for (int column = 0; column < canvas.columns(); ++column) {
      axis += glyphs.across;
    }
    lines.push_back(axis);
    lines.push_back(TickLabels(layout, canvas, margin, width));
    std::string legend;
    if (layout.readings.empty()) {
      legend = "no reading yet";
    } else {
      legend = std::string(glyphs.reading) + " reading  " + glyphs.limits + " limits  " +
               glyphs.below + " below  " + glyphs.law + " root law";
    }
    if (layout.goal) {
      legend += std::string("  ") + glyphs.goal + " goal " + Brief(*layout.goal);
    }
    if (layout.planned_end) {
      events += std::string("  ") + glyphs.planned_end + " forecast";
    }
    lines.push_back(CutTo(legend, width));
    lines.push_back(CutTo(events, width));
  }
  std::string text;
  for (std::string& line : lines) {
    while (!line.empty() && line.back() == ' ') {
      line.pop_back();
    }
    text.append(line).push_back('\n');
  }
  return text;
}

}  // namespace lastscan::drawing
