// The figure of a run: signal-to-noise against scans on square-root axes, where
// the root-of-scans law is a straight line, with intervals, target, plan,
// booking end and advised stop. One description, two renderings.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "drawing/advice_text.h"
#include "lastscan/v1/advice.pb.h"

namespace lastscan::drawing {

struct ProgressFigure {
  std::vector<v1::Advice> history;  // in order of scans, one run
  std::optional<double> scans_at_booking_end;
};

// Plain text of exactly `rows` lines, each at most style.width columns and ended
// by a line feed. Below 10 rows or 36 columns there is no room for a figure: the
// first line then says so.
std::string DrawForTerminal(const ProgressFigure& figure, int rows, const Style& style);

enum class SvgShape {
  kWide,  // 720 by 420 units, for a desk
  kTall,  // 360 by 420 units, for a phone, with letters of the same size
};

// A self-contained <svg> element with title and description for screen readers;
// colours by CSS classes with built-in defaults for light and dark.
std::string DrawAsSvg(const ProgressFigure& figure, SvgShape shape = SvgShape::kWide);

// The figure in a few sentences of plain text (not escaped), for those who hear it.
std::string DescribeInWords(const ProgressFigure& figure);

}  // namespace lastscan::drawing
