// The progress figure as SVG. Each thing has a shape or a label of its own, so
// that nothing hangs on colour: readings are discs with a bar, upper limits open
// triangles, the goal a dashed line with its number, events lines with a label.
#include <algorithm>
#include <array>
#include <charconv>
#include <cmath>
#include <string>
#include <string_view>

#include "drawing/escape.h"
#include "drawing/progress_figure.h"
#include "drawing/progress_layout.h"
#include "drawing/words.h"

namespace lastscan::drawing {
namespace {

// Ink on paper by day, chalk on slate by night. Contrast of every ink with its
// ground is at least 4.5 to 1.
constexpr std::string_view kStyle =
    "<style>"
    ".progress{--ground:#fffdf8;--ink:#22262b;--faint:#d9d5ca;--run:#0b5e7a;"
    "--aim:#8a3b00;--mark:#4b3a8c}"
    "@media (prefers-color-scheme:dark){.progress{--ground:#14181c;--ink:#e6e3da;"
    "--faint:#363c42;--run:#6cc5e6;--aim:#f0a35e;--mark:#b9a8f5}}"
    ".progress text{font:13px system-ui,sans-serif;fill:var(--ink)}"
    ".progress .ground{fill:var(--ground)}"
    ".progress .axis{stroke:var(--ink);stroke-width:1.2;fill:none}"
    ".progress .grid{stroke:var(--faint);stroke-width:1}"
    ".progress .wedge{fill:var(--run);opacity:.16}"
    ".progress .law{stroke:var(--run);stroke-width:1.5}"
    ".progress .forecast{stroke:var(--run);stroke-width:1.5;stroke-dasharray:2 4}"
    ".progress .limits{stroke:var(--run);stroke-width:1.5;opacity:.6}"
    ".progress .reading{fill:var(--run)}"
    ".progress .below{fill:var(--ground);stroke:var(--run);stroke-width:1.5}"
    ".progress .planned-end{fill:var(--ground);stroke:var(--run);stroke-width:2}"
    ".progress .goal{stroke:var(--aim);stroke-width:2;stroke-dasharray:12 5}"
    ".progress .event{stroke:var(--mark);stroke-width:1.5}"
    ".progress .stop{stroke-width:3}"
    ".progress .plan{stroke-dasharray:1 3}"
    ".progress .booking{stroke-dasharray:7 3 1 3}"
    ".progress text.goal-label{fill:var(--aim)}"
    ".progress text.event-label{fill:var(--mark);stroke:var(--ground);stroke-width:5;"
    "paint-order:stroke}"
    "</style>";

std::string Coordinate(double value) {
  std::array<char, 64> text{};
  const auto result =
      std::to_chars(text.data(), text.data() + text.size(), value, std::chars_format::fixed, 2);
  return {text.data(), result.ptr};
}

// Writes elements in the coordinates of the figure.
class Sheet {
 public:
  Sheet(const ProgressLayout& layout, double width, double height)
      : layout_(layout), width_(width), height_(height) {}

  double X(double scans) const { return kLeft + layout_.Across(scans) * plot_width(); }
  double Y(double signal) const { return height_ - kBottom - layout_.Up(signal) * plot_height(); }
  // Cut at the upper edge.
  double YInside(double signal) const { return std::max(Y(std::max(signal, 0.0)), kTop); }
  double left() const { return kLeft; }
  double right() const { return width_ - kRight; }
  double top() const { return kTop; }
  double bottom() const { return height_ - kBottom; }
  double plot_width() const { return right() - left(); }
  double plot_height() const { return bottom() - top(); }

  void Line(std::string_view kind, double x1, double y1, double x2, double y2) {
    text_ += "<line class=\"" + std::string(kind) + "\" x1=\"" + Coordinate(x1) + "\" y1=\"" +
             Coordinate(y1) + "\" x2=\"" + Coordinate(x2) + "\" y2=\"" + Coordinate(y2) + "\"/>\n";
  }
  void Disc(std::string_view kind, double x, double y) {
    text_ += "<circle class=\"" + std::string(kind) + "\" cx=\"" + Coordinate(x) + "\" cy=\"" +
             Coordinate(y) + "\" r=\"3.5\"/>\n";
  }
  void Path(std::string_view kind, const std::string& d) {
    text_ += "<path class=\"" + std::string(kind) + "\" d=\"" + d + "\"/>\n";
  }
  // `words` is not escaped yet.
  void Text(std::string_view kind, double x, double y, std::string_view anchor,
            std::string_view words) {
    text_ += "<text class=\"" + std::string(kind) + "\" x=\"" + Coordinate(x) + "\" y=\"" +
             Coordinate(y) + "\" text-anchor=\"" + std::string(anchor) + "\">" + ForMarkup(words) +
             "</text>\n";
  }
  // A ray of the law through (scans, signal), from scan `from` to the right or
  // upper edge, whichever comes first: its end.
  struct Point {
    double x, y;
  };
  Point RayEnd(double scans, double signal) const {
    const double up = layout_.Up(signal) / layout_.Across(scans);  // at the right edge
    const double share = up > 1 ? 1 / up : 1;
    return {kLeft + share * plot_width(), bottom() - share * up * plot_height()};
  }

  std::string text_;

 private:
  static constexpr double kLeft = 52;
  static constexpr double kRight = 16;
  static constexpr double kTop = 74;  // three rows of labels
  static constexpr double kBottom = 48;
  const ProgressLayout& layout_;
  double width_;
  double height_;
};

void DrawAxes(const ProgressLayout& layout, Sheet* sheet) {
  for (double tick : layout.signal_ticks) {
    const double y = sheet->Y(tick);
    sheet->Line("grid", sheet->left(), y, sheet->right(), y);
    sheet->Text("tick", sheet->left() - 7, y + 4, "end", Brief(tick));
  }
  double free_from = 0;
  for (std::uint64_t tick : layout.scan_ticks) {
    const double x = sheet->X(static_cast<double>(tick));
    sheet->Line("axis", x, sheet->bottom(), x, sheet->bottom() + 5);
    const std::string label = std::to_string(tick);
    const double half = 4.0 * static_cast<double>(label.size());
    if (x - half >= free_from && x + half <= sheet->right() + 14) {
      sheet->Text("tick", x, sheet->bottom() + 19, "middle", label);
      free_from = x + half + 6;
    }
  }
  sheet->Path("axis", "M" + Coordinate(sheet->left()) + " " + Coordinate(sheet->top()) + "V" +
                          Coordinate(sheet->bottom()) + "H" + Coordinate(sheet->right()));
  sheet->Text("name", 8, 20, "start", "signal-to-noise");
  sheet->Text("name", sheet->right(), sheet->bottom() + 38, "end", "scans (root axis)");
}

void DrawLaw(const ProgressLayout& layout, Sheet* sheet) {
  if (!layout.law) {
    return;
  }
  const Reading& law = *layout.law;
  const double x0 = sheet->left();
  const double y0 = sheet->bottom();
  const Sheet::Point low = sheet->RayEnd(law.scans, law.lower);
  const Sheet::Point high = sheet->RayEnd(law.scans, law.upper);
  const auto point = [](double x, double y) { return Coordinate(x) + " " + Coordinate(y); };
  // Where the two edges leave at different sides the corner lies between them.
  const std::string corner = high.x < sheet->right() && low.x >= sheet->right()
                                 ? "L" + point(sheet->right(), sheet->top())
                                 : "";
  sheet->Path("wedge", "M" + point(x0, y0) + "L" + point(high.x, high.y) + corner + "L" +
                           point(low.x, low.y) + "Z");
  const double x = sheet->X(law.scans);
  const double y = sheet->Y(law.estimate);
  const Sheet::Point end = sheet->RayEnd(law.scans, law.estimate);
  sheet->Line("law", x0, y0, x, y);
  if (end.x > x) {
    sheet->Line("forecast", x, y, end.x, end.y);
  }
}

void DrawEvents(const ProgressLayout& layout, Sheet* sheet) {
  constexpr double kRow = 18;
  double row = 20;
  for (const Event& event : layout.events) {
    const double x = sheet->X(event.scans);
    const std::string_view kind = event.letter == 'S'   ? "event stop"
                                  : event.letter == 'P' ? "event plan"
                                                        : "event booking";
    sheet->Line(kind, x, row + 5, x, sheet->bottom());
    row += kRow;
  }
  // Labels after all lines: where one crosses another's line it stays readable.
  row = 20;
  for (const Event& event : layout.events) {
    const double x = sheet->X(event.scans);
    const bool to_the_left = x > sheet->left() + sheet->plot_width() / 2;
    sheet->Text("event-label", to_the_left ? x + 4 : x - 4, row, to_the_left ? "end" : "start",
                event.label);
    row += kRow;
  }
}

void DrawReadings(const ProgressLayout& layout, Sheet* sheet) {
  for (const Reading& reading : layout.readings) {
    const double x = sheet->X(reading.scans);
    if (!reading.confirmed) {
      const double y = sheet->YInside(reading.upper);
      sheet->Path("below", "M" + Coordinate(x - 4) + " " + Coordinate(y - 4) + "h8l-4 7Z");
      continue;
    }
    sheet->Line("limits", x, sheet->YInside(reading.lower), x, sheet->YInside(reading.upper));
    sheet->Disc("reading", x, sheet->YInside(reading.estimate));
  }
  if (layout.planned_end) {
    const Reading& end = *layout.planned_end;
    const double x = sheet->X(end.scans);
    const double y = sheet->YInside(end.estimate);
    sheet->Line("limits", x, sheet->YInside(end.lower), x, sheet->YInside(end.upper));
    sheet->Path("planned-end", "M" + Coordinate(x) + " " + Coordinate(y - 6) + "l6 6l-6 6l-6 -6Z");
  }
}

}  // namespace

std::string DrawAsSvg(const ProgressFigure& figure, SvgShape shape) {
  const double width = shape == SvgShape::kWide ? 720 : 360;
  const double height = 420;
  const ProgressLayout layout = LayOut(figure);
  Sheet sheet(layout, width, height);
  DrawAxes(layout, &sheet);
  DrawLaw(layout, &sheet);
  DrawEvents(layout, &sheet);
  if (layout.goal) {
    const double y = sheet.Y(*layout.goal);
    sheet.Line("goal", sheet.left(), y, sheet.right(), y);
    sheet.Text("goal-label", sheet.left() + 6, y - 5, "start", "goal " + Brief(*layout.goal));
  }
  DrawReadings(layout, &sheet);
  if (layout.readings.empty()) {
    sheet.Text("name", (sheet.left() + sheet.right()) / 2, (sheet.top() + sheet.bottom()) / 2,
               "middle", "no reading yet");
  }
  const std::string of =
      figure.history.empty() ? "" : " of run " + ForMarkup(figure.history.back().run());
  return "<svg xmlns=\"http://www.w3.org/2000/svg\" class=\"progress\" viewBox=\"0 0 " +
         Coordinate(width) + " " + Coordinate(height) +
         "\" role=\"img\" aria-labelledby=\"progress-title progress-text\">\n"
         "<title id=\"progress-title\">Progress" +
         of + "</title>\n<desc id=\"progress-text\">" + ForMarkup(DescribeInWords(figure)) +
         "</desc>\n" + std::string(kStyle) + "\n<rect class=\"ground\" width=\"" +
         Coordinate(width) + "\" height=\"" + Coordinate(height) + "\" rx=\"6\"/>\n" + sheet.text_ +
         "</svg>\n";
}

}  // namespace lastscan::drawing
