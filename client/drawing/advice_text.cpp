// Advice in words. Order: what to do, the number, the time, then the rest.
#include "drawing/advice_text.h"

#include <algorithm>
#include <cmath>
#include <string>

#include "drawing/escape.h"
#include "drawing/words.h"
#include "drawing/wrap.h"
#include "engine/advice/cautions.h"

namespace lastscan::drawing {
namespace {

constexpr std::string_view kPlain = "\033[0m";

// The word itself carries the meaning; colour only helps the eye to find it.
std::string_view ColourOf(v1::Verdict verdict) {
  switch (verdict) {
    case v1::ENOUGH:
      return "\033[1;7;36m";
    case v1::ON_COURSE:
      return "\033[1;36m";
    case v1::EXTEND:
      return "\033[1;34m";
    case v1::OUT_OF_REACH:
      return "\033[1;33m";
    case v1::INSPECT:
      return "\033[1;7;35m";
    default:
      return "\033[1m";
  }
}

std::string Upper(std::string_view words) {
  std::string upper(words);
  std::transform(upper.begin(), upper.end(), upper.begin(),
                 [](char c) { return c >= 'a' && c <= 'z' ? static_cast<char>(c - 32) : c; });
  return upper;
}

// Puts colour around the first `word` of text, after wrapping has counted columns.
std::string Coloured(std::string text, std::string_view word, std::string_view colour,
                     const Style& style) {
  const std::size_t at = text.find(word);
  if (!style.colour || at == std::string::npos) {
    return text;
  }
  text.insert(at + word.size(), kPlain);
  text.insert(at, colour);
  return text;
}

std::string Title(std::string_view words, const Style& style) {
  return Coloured("\n" + std::string(words) + "\n", words, "\033[1m", style);
}

std::string ScansDone(const v1::Advice& advice) {
  const std::string done = std::to_string(advice.scans_done());
  const std::string planned = std::to_string(advice.scans_planned());
  if (advice.scans_planned() == 0) {
    return done;
  }
  return advice.scans_done() > advice.scans_planned() ? done + " (" + planned + " planned)"
                                                      : done + " of " + planned;
}

// True when there is a number of scans to be said.
bool KnowsScansNeeded(const v1::Advice& advice) {
  return std::isfinite(advice.scans_needed().estimate()) && advice.scans_needed().estimate() > 0;
}

// Rows of "label  value", as many as are known.
class Facts {
 public:
  explicit Facts(int width) : width_(width) {}

  void Add(std::string_view label, const std::string& value) {
    if (value.empty()) {
      return;
    }
    if (width_ < 48) {  // no room for two columns
      text_ += Wrapped(std::string(label) + ": " + value, width_, "", "  ");
      return;
    }
    std::string first = "  " + std::string(label);
    first.resize(std::max<std::size_t>(first.size(), kLabelColumns), ' ');
    text_ += Wrapped(value, width_, first, std::string(kLabelColumns, ' '));
  }

  const std::string& text() const { return text_; }

 private:
  static constexpr std::size_t kLabelColumns = 21;
  int width_;
  std::string text_;
};

std::string FactsOf(const v1::Advice& advice, int width) {
  Facts facts(width);
  const bool enough = advice.verdict() == v1::ENOUGH;
  const bool confirmed = advice.limiting_line().confirmed();
  std::string reading = ReadingInWords(advice);
  if (advice.has_goal() && advice.goal().target() > 0) {
    reading += "; the goal is " + Brief(advice.goal().target()) + ", " +
               std::string(ConventionInWords(advice.goal().convention()));
  }
  facts.Add("Signal-to-noise", reading);
  facts.Add("Scans done", ScansDone(advice));
  if (!enough && KnowsScansNeeded(advice)) {
    facts.Add("Scans needed", ScansWithLimits(advice.scans_needed()));
  }
  if (!enough) {
    facts.Add("Goal met about", ClockTimes(advice.finish_at(), advice.issued_at()));
    facts.Add("Chance in time", Chance(advice.chance_by_booking_end()));
  }
  if (advice.scans_saved() > 0) {
    std::string saved = std::to_string(advice.scans_saved()) + " scans";
    if (advice.seconds_saved() > 0) {
      saved += ", " + DurationInWords(advice.seconds_saved());
    }
    facts.Add("Saved", saved);
  }
  if (confirmed && advice.scans_planned() > advice.scans_done() &&
      advice.at_planned_end().estimate() > 0) {
    facts.Add("At the planned end", WithLimits(advice.at_planned_end()));
  }
  if (confirmed) {
    facts.Add("Limiting line", "at " + Shift(advice.limiting_line().shift_ppm()) + ", " +
                                   Number(advice.limiting_line().width_hz()) + " Hz wide");
  }
  if (advice.matched_gain() > 1.05 && std::isfinite(advice.matched_gain())) {
    facts.Add("Line broadening", "of " + Number(advice.matched_broadening_hz()) +
                                     " Hz would raise the reading by a factor of " +
                                     Number(advice.matched_gain()));
  }
  if (advice.seconds_per_scan() > 0) {
    facts.Add("Time per scan", Number(advice.seconds_per_scan()) + " s");
  }
  if (advice.noise().growth_exponent().estimate() > 0) {
    facts.Add("Noise grows as", "scans to the power " +
                                    ExponentWithLimits(advice.noise().growth_exponent()) +
                                    "; 0.5 is right");
  }
  return facts.text();
}

std::string LinesOf(const v1::Advice& advice, int width) {
  // With one line, the limiting one, the facts have said it all.
  if (advice.lines_size() < 2) {
    return {};
  }
  constexpr int kMost = 12;
  std::string text;
  int said = 0;
  for (const v1::Line& line : advice.lines()) {
    if (++said > kMost) {
      text += Wrapped("and " + std::to_string(advice.lines_size() - kMost) + " more", width, "  ",
                      "  ");
      break;
    }
    const std::string reading = line.confirmed()
                                    ? WithLimits(line.signal_to_noise())
                                    : "below " + Number(line.signal_to_noise().upper()) + " so far";
    std::string where = "at " + Shift(line.shift_ppm()) + ": ";
    text += Wrapped(where + reading +
                        (line.window() >= 0 ? ", window " + std::to_string(line.window() + 1) : ""),
                    width, "  ", "    ");
  }
  return text;
}

std::string FindingText(const v1::Finding& finding) {
  std::string text = Upper(SeverityInWords(finding.severity())) + ": " +
                     std::string(FindingInWords(finding.kind()));
  if (finding.since_scan() > 0) {
    text += ", since scan " + std::to_string(finding.since_scan());
  }
  if (!finding.detail().empty()) {
    text += ": " + ForTerminal(finding.detail());
  }
  return text;
}

std::string CautionsOf(const v1::Advice& advice, int width) {
  std::string text;
  for (const std::string& caution : advice.cautions()) {
    text += Wrapped(ForTerminal(caution), width, "- ", "  ");
  }
  if (advice.cautions().empty()) {  // an advice made by something else than our engine
    for (std::string_view caution : engine::Cautions()) {
      text += Wrapped(caution, width, "- ", "  ");
    }
  }
  return text;
}

}  // namespace

std::string AdviceLine(const v1::Advice& advice, const Style& style) {
  std::string text = "scan " + ScansDone(advice) + ": ";
  const std::string verdict = Upper(VerdictInWords(advice.verdict()));
  text += verdict + "; signal-to-noise " + ReadingInWords(advice);
  if (advice.goal().target() > 0) {
    text += ", goal " + Brief(advice.goal().target());
  }
  if (advice.verdict() == v1::ENOUGH) {
    text +=
        "; stop at scan " + std::to_string(std::max(advice.scans_advised(), advice.scans_done()));
    if (advice.scans_saved() > 0) {
      text += ", saves " + std::to_string(advice.scans_saved()) + " scans";
      if (advice.seconds_saved() > 0) {
        text += " and " + DurationInWords(advice.seconds_saved());
      }
    }
  } else if (KnowsScansNeeded(advice)) {
    text += "; needs " + ScansWithLimits(advice.scans_needed()) + " scans";
    if (advice.finish_at().has_estimate()) {
      text += ", about " + ClockTime(advice.finish_at().estimate(), advice.issued_at());
    }
  }
  if (advice.verdict() == v1::EXTEND && advice.scans_advised() > advice.scans_planned()) {
    text += "; plan " + std::to_string(advice.scans_advised()) + " in all";
  }
  for (const v1::Finding& finding : advice.findings()) {
    if (finding.severity() >= v1::WARNING) {
      text += "; " + std::string(SeverityInWords(finding.severity())) + ": " +
              std::string(FindingInWords(finding.kind()));
    }
  }
  return Coloured(std::move(text), verdict, ColourOf(advice.verdict()), style);
}

std::string AdviceInFull(const v1::Advice& advice, const Style& style) {
  const int width = std::max(style.width, kLeastWidth);
  const std::string verdict = Upper(VerdictInWords(advice.verdict()));
  std::string text = Coloured(Wrapped(verdict + ". " + WhatToDo(advice), width, "", "  "), verdict,
                              ColourOf(advice.verdict()), style);
  if (!advice.because().empty()) {
    text += Wrapped(ForTerminal(advice.because()), width, "", "");
  }
  std::string who = ForTerminal(advice.run());
  for (const std::string& name : {advice.sample(), advice.instrument(), advice.nucleus()}) {
    if (!name.empty()) {
      who += (who.empty() ? "" : ", ") + ForTerminal(name);
    }
  }
  const std::string when = ClockTime(advice.issued_at(), {});
  text += "\n" + Wrapped("Run " + who + (when.empty() ? "" : ", seen " + when), width, "", "  ");
  text += FactsOf(advice, width);
  if (const std::string lines = LinesOf(advice, width); !lines.empty()) {
    text += Title("Lines", style) + lines;
  }
  if (!advice.findings().empty()) {
    text += Title("Findings", style);
    for (const v1::Finding& finding : advice.findings()) {
      text += Coloured(Wrapped(FindingText(finding), width, "", "  "),
                       Upper(SeverityInWords(finding.severity())), "\033[1m", style);
    }
  }
  return text + Title("Cautions", style) + CautionsOf(advice, width);
}

}  // namespace lastscan::drawing
