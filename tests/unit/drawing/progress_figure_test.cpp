// The figure: the root-of-scans law is a straight line through the origin in
// both renderings, everything is where its number says, and no name gets out of
// its place.
#include "drawing/progress_figure.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <cstdlib>
#include <pugixml.hpp>
#include <regex>

#include "drawing/escape.h"
#include "drawing/progress_layout.h"
#include "unit/drawing/invented_advice.h"

namespace lastscan::drawing {
namespace {

using testing::HasSubstr;
using testing::Not;

ProgressFigure LawfulFigure() { return {test::LawfulHistory(), 1400.0}; }

class Svg {
 public:
  explicit Svg(const ProgressFigure& figure, SvgShape shape = SvgShape::kWide)
      : text_(DrawAsSvg(figure, shape)) {
    well_formed_ = document_.load_string(text_.c_str());
  }
  bool well_formed() const { return well_formed_; }
  const std::string& text() const { return text_; }
  std::vector<pugi::xml_node> OfClass(const std::string& name) const {
    std::vector<pugi::xml_node> nodes;
    for (const pugi::xml_node& node : document_.child("svg").children()) {
      const std::string classes = std::string(" ") + node.attribute("class").value() + " ";
      if (classes.find(" " + name + " ") != std::string::npos) {
        nodes.push_back(node);
      }
    }
    return nodes;
  }
  pugi::xml_node root() const { return document_.child("svg"); }
  // Where both axes begin, from the path of the axes: "Mx y Vy2 Hx2".
  std::pair<double, double> Origin() const {
    for (const pugi::xml_node& node : OfClass("axis")) {
      const std::string d = node.attribute("d").value();
      if (!d.empty()) {
        return {std::strtod(d.c_str() + 1, nullptr),
                std::strtod(d.c_str() + d.find('V') + 1, nullptr)};
      }
    }
    return {NAN, NAN};
  }

 private:
  std::string text_;
  pugi::xml_document document_;
  bool well_formed_ = false;
};

TEST(SvgFigure, TheLawIsAStraightLineThroughTheOrigin) {
  for (SvgShape shape : {SvgShape::kWide, SvgShape::kTall}) {
    const Svg svg(LawfulFigure(), shape);
    ASSERT_TRUE(svg.well_formed());
    const auto [x0, y0] = svg.Origin();
    const std::vector<pugi::xml_node> discs = svg.OfClass("reading");
    ASSERT_GE(discs.size(), 10u);
    const pugi::xml_node last = discs.back();
    const double slope =
        (y0 - last.attribute("cy").as_double()) / (last.attribute("cx").as_double() - x0);
    for (const pugi::xml_node& disc : discs) {
      const double x = disc.attribute("cx").as_double();
      // Coordinates are written to 0.01.
      EXPECT_NEAR(y0 - slope * (x - x0), disc.attribute("cy").as_double(), 0.02);
    }
    const pugi::xml_node forecast = svg.OfClass("forecast").at(0);
    EXPECT_NEAR(y0 - slope * (forecast.attribute("x2").as_double() - x0),
                forecast.attribute("y2").as_double(), 0.05);
    // The goal is met where the law crosses it: at (10/0.4)^2 = 625 scans, in
    // root coordinates at 25/sqrt(512) of the last reading's place.
    const double goal = svg.OfClass("goal").at(0).attribute("y1").as_double();
    EXPECT_NEAR((y0 - goal) / slope,
                (last.attribute("cx").as_double() - x0) * 25 / std::sqrt(512.0), 0.05);
  }
}

TEST(SvgFigure, ARunThatLeavesTheLawIsNotStraight) {
  ProgressFigure figure = LawfulFigure();
  for (v1::Advice& advice : figure.history) {  // signal grows as scans^0.3
    const double reading = std::pow(static_cast<double>(advice.scans_done()), 0.3) + 3;
    advice.mutable_limiting_line()->set_confirmed(true);
    advice.mutable_signal_to_noise()->set_estimate(reading);
  }
  const Svg svg(figure);
  const auto [x0, y0] = svg.Origin();
  const std::vector<pugi::xml_node> discs = svg.OfClass("reading");
  const auto steepness = [x0 = x0, y0 = y0](const pugi::xml_node& disc) {
    return (y0 - disc.attribute("cy").as_double()) / (disc.attribute("cx").as_double() - x0);
  };
  EXPECT_GT(steepness(discs.front()), 1.5 * steepness(discs.back()));
}

TEST(SvgFigure, StandsInsideItsBox) {
  const Svg svg(LawfulFigure());
  for (const pugi::xml_node& node : svg.root().children()) {
    for (const char* name : {"x", "x1", "x2", "cx"}) {
      if (node.attribute(name)) {
        EXPECT_GE(node.attribute(name).as_double(), 0) << node.attribute("class").value();
        EXPECT_LE(node.attribute(name).as_double(), 720);
      }
    }
    for (const char* name : {"y", "y1", "y2", "cy"}) {
      if (node.attribute(name)) {
        EXPECT_GE(node.attribute(name).as_double(), 0) << node.attribute("class").value();
        EXPECT_LE(node.attribute(name).as_double(), 420);
      }
    }
  }
}

TEST(SvgFigure, IsSaidInWordsToo) {
  const Svg svg(LawfulFigure());
  EXPECT_STREQ(svg.root().attribute("role").value(), "img");
  EXPECT_THAT(svg.root().child_value("title"), HasSubstr("night-7"));
  EXPECT_THAT(svg.root().child_value("desc"), HasSubstr("After 512 scans: 9.1"));
  EXPECT_THAT(svg.root().child_value("desc"), HasSubstr("The goal is 10"));
  EXPECT_THAT(svg.text(), HasSubstr("prefers-color-scheme:dark"));
  EXPECT_EQ(svg.OfClass("below").size(), 3u);  // below 4: at 32, 64 and 96 scans
  for (const char* label : {"stop 632", "plan 1024", "booking ends 1400", "goal 10"}) {
    EXPECT_THAT(svg.text(), HasSubstr(label));
  }
}

TEST(SvgFigure, KeepsAHostileNameInItsPlace) {
  ProgressFigure figure = LawfulFigure();
  for (v1::Advice& advice : figure.history) {
    advice.set_run("</title><script>alert(1)</script>\033[2J");
  }
  const Svg svg(figure);
  ASSERT_TRUE(svg.well_formed());
  EXPECT_THAT(svg.text(), Not(HasSubstr("<script")));
  EXPECT_THAT(svg.text(), Not(HasSubstr("\033")));
  EXPECT_THAT(svg.root().child_value("title"), HasSubstr("</title><script>"));
}

std::vector<ProgressFigure> OddFigures() {
  constexpr double kEndless = std::numeric_limits<double>::infinity();
  v1::Advice endless = test::LawfulAdvice(256);
  endless.mutable_signal_to_noise()->set_upper(kEndless);
  endless.mutable_at_planned_end()->set_upper(kEndless);
  v1::Advice huge = test::LawfulAdvice(1);
  huge.set_scans_done(4'000'000'000'000);
  huge.mutable_signal_to_noise()->set_estimate(1e12);
  huge.mutable_limiting_line()->set_confirmed(true);
  v1::Advice zero;
  return {{{}, {}},
          {{zero}, 0.0},
          {{test::AdviceOfNoNumbers()}, kEndless},
          {{test::LawfulAdvice(16), endless}, std::nan("")},
          {{huge}, 1e300}};
}

TEST(Figures, NeverHoldNan) {
  const std::regex not_a_word("\\b-?(nan|inf)\\b", std::regex::icase);
  for (const ProgressFigure& figure : OddFigures()) {
    const Svg svg(figure);
    EXPECT_TRUE(svg.well_formed());
    EXPECT_FALSE(std::regex_search(svg.text(), not_a_word)) << svg.text();
    EXPECT_FALSE(std::regex_search(DrawForTerminal(figure, 20, Style{}), not_a_word));
    EXPECT_FALSE(std::regex_search(DescribeInWords(figure), not_a_word));
  }
}

TEST(TerminalFigure, FillsExactlyItsRowsAndNeverMoreThanItsColumns) {
  std::vector<ProgressFigure> figures = OddFigures();
  figures.push_back(LawfulFigure());
  for (const ProgressFigure& figure : figures) {
    for (int rows : {1, 9, 10, 17, 24, 60}) {
      for (int width : {1, 20, 36, 80, 200}) {
        for (bool plain : {false, true}) {
          Style style;
          style.width = width;
          style.plain = plain;
          const std::vector<std::string> lines =
              test::LinesOf(DrawForTerminal(figure, rows, style));
          ASSERT_EQ(lines.size(), static_cast<std::size_t>(rows));
          for (const std::string& line : lines) {
            EXPECT_LE(Columns(line), width) << line;
          }
        }
      }
    }
  }
}

TEST(TerminalFigure, PlainIsAscii) {
  Style style;
  style.plain = true;
  style.width = 200;
  const std::string text = DrawForTerminal(LawfulFigure(), 24, style);
  for (char c : text) {
    EXPECT_TRUE(c == '\n' || (c >= 0x20 && c < 0x7F)) << static_cast<int>(c);
  }
  EXPECT_THAT(text, HasSubstr("S stop 632"));
  EXPECT_THAT(text, HasSubstr("goal 10"));
}

TEST(TerminalFigure, TheLawIsAStraightLine) {
  ProgressFigure figure = LawfulFigure();
  Style style;
  style.width = 120;
  style.plain = true;
  std::vector<std::pair<double, double>> at;  // column, row of each reading
  const std::vector<std::string> lines = test::LinesOf(DrawForTerminal(figure, 50, style));
  const std::size_t axis = lines[1].find('|');
  std::size_t bottom = 0;
  for (std::size_t row = 1; row < lines.size(); ++row) {
    if (lines[row].find('+') == axis) {
      bottom = row - 1;
      break;
    }
    for (std::size_t column = axis + 1; column < lines[row].size(); ++column) {
      if (lines[row][column] == 'o') {
        at.emplace_back(column - axis - 0.5, row);
      }
    }
  }
  ASSERT_GE(at.size(), 8u);
  ASSERT_GT(bottom, 10u);
  const auto height = [&](double row) { return static_cast<double>(bottom) + 0.5 - row; };
  const double slope = height(at.front().second) / at.front().first;  // the topmost
  for (const auto& [column, row] : at) {
    EXPECT_NEAR(height(row), slope * column, 1.01) << "more than a cell off the line";
  }
}

TEST(Layout, TicksStandAtEvenDistancesOnTheRootAxis) {
  const ProgressLayout layout = LayOut(LawfulFigure());
  ASSERT_GE(layout.scan_ticks.size(), 4u);
  const double step = layout.Across(static_cast<double>(layout.scan_ticks[1]));
  for (std::size_t i = 0; i < layout.scan_ticks.size(); ++i) {
    EXPECT_NEAR(layout.Across(static_cast<double>(layout.scan_ticks[i])),
                step * static_cast<double>(i), 1e-9);
  }
}

TEST(Layout, ABookingFarAwayDoesNotPressTheRunIntoACorner) {
  ProgressFigure figure = LawfulFigure();
  figure.scans_at_booking_end = 1e6;
  const ProgressLayout layout = LayOut(figure);
  EXPECT_GT(layout.Across(1024), 0.9);
  for (const Event& event : layout.events) {
    EXPECT_NE(event.letter, 'B');
  }
}

}  // namespace
}  // namespace lastscan::drawing
