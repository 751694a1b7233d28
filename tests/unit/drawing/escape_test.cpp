// Hostile names: what reaches a terminal or a browser is harmless, and honest
// names come through unchanged.
#include "drawing/escape.h"

#include <gtest/gtest.h>

#include <pugixml.hpp>
#include <string>

namespace lastscan::drawing {
namespace {

TEST(ForTerminal, LeavesNoControlCharacter) {
  std::string all;
  for (int c = 0; c < 256; ++c) {
    all += static_cast<char>(c);
    all += 'x';
  }
  const std::string clean = ForTerminal(all);
  for (char c : clean) {
    EXPECT_TRUE(static_cast<unsigned char>(c) >= 0x20 && c != 0x7F) << static_cast<int>(c);
  }
  EXPECT_EQ(ForTerminal("\033[2Jwiped"), "\xEF\xBF\xBD[2Jwiped");
}

TEST(ForTerminal, TakesOutC1AndDirectionOverrides) {
  EXPECT_EQ(ForTerminal("a\xC2\x9B"
                        "31mb"),
            "a\xEF\xBF\xBD"
            "31mb");  // U+009B
  EXPECT_EQ(ForTerminal("a\xE2\x80\xAE"
                        "b"),
            "a\xEF\xBF\xBD"
            "b");  // U+202E
  EXPECT_EQ(ForTerminal("a\xE2\x81\xA6"
                        "b"),
            "a\xEF\xBF\xBD"
            "b");  // U+2066
}

TEST(ForTerminal, LeavesHonestNamesAlone) {
  for (const char* name : {"resin B/2", "Probe Müller", "β-pinène 10 %", "試料 7", ""}) {
    EXPECT_EQ(ForTerminal(name), name);
    EXPECT_EQ(ForTerminal(ForTerminal(name)), name);
  }
}

TEST(ForTerminal, TakesBytesThatAreNotUtf8) {
  EXPECT_EQ(ForTerminal("\xFF"), "\xEF\xBF\xBD");
  EXPECT_EQ(ForTerminal("ab\xE2\x82"), "ab\xEF\xBF\xBD\xEF\xBF\xBD");  // cut short
  EXPECT_EQ(ForTerminal("\xC0\xAF").find('/'), std::string::npos);     // overlong
}

TEST(ForMarkup, AnyNameIsOneTextAndOneAttribute) {
  for (const std::string& name :
       {std::string("<script>alert(1)</script>"), std::string("\"><img src=x onerror=y>"),
        std::string("' onload='x"), std::string("]]>&amp;&#0;"), std::string("a\0b\x01", 4),
        std::string("\xFE\xFF")}) {
    const std::string text =
        "<a b=\"" + ForMarkup(name) + "\" c='" + ForMarkup(name) + "'>" + ForMarkup(name) + "</a>";
    pugi::xml_document document;
    ASSERT_TRUE(document.load_string(text.c_str(), pugi::parse_full)) << text;
    const pugi::xml_node a = document.child("a");
    EXPECT_EQ(a.attribute("b").value(), ForTerminal(name));
    EXPECT_EQ(a.attribute("c").value(), ForTerminal(name));
    EXPECT_EQ(a.child_value(), ForTerminal(name));
    EXPECT_EQ(std::distance(document.children().begin(), document.children().end()), 1);
    EXPECT_EQ(std::distance(a.children().begin(), a.children().end()), 1);
  }
}

TEST(ForAddress, HasOnlyCharactersThatMeanNothing) {
  EXPECT_EQ(ForAddress("night-7_a.b~c"), "night-7_a.b~c");
  EXPECT_EQ(ForAddress("a/b?c&d=e #%\""), "a%2Fb%3Fc%26d%3De%20%23%25%22");
  EXPECT_EQ(ForAddress("\xC3\xBC"), "%C3%BC");
}

TEST(Columns, CountsWhatATerminalShows) {
  EXPECT_EQ(Columns("abc"), 3);
  EXPECT_EQ(Columns("Müller"), 6);
  EXPECT_EQ(Columns("試料"), 4);       // two columns each
  EXPECT_EQ(Columns("e\xCC\x81"), 1);  // letter and combining accent
}

TEST(CutTo, NeverExceedsAndNeverBreaksACharacter) {
  const std::string name = "試料 Müller 試料";
  for (int columns = 1; columns < 20; ++columns) {
    const std::string cut = CutTo(name, columns);
    EXPECT_LE(Columns(cut), columns);
    EXPECT_EQ(ForTerminal(cut), cut) << "a broken character at " << columns;
  }
  EXPECT_EQ(CutTo("short", 5), "short");
}

}  // namespace
}  // namespace lastscan::drawing
