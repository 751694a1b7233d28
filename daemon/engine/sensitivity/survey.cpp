#include "engine/sensitivity/survey.h"

#include <algorithm>
#include <cmath>

namespace lastscan::engine {
namespace {

constexpr double kLower = 0.025;
constexpr double kUpper = 0.975;
constexpr double kNormal95 = 1.959963984540054;
constexpr double kPlainlyNormal = 12;  // deviations from zero

// The bins of `ranges` that no confirmed line fills, thinned to independent
// ones: where a further line could hide.
std::vector<float> EmptyBins(const ScaledSpectrum& spectrum, std::span<const double> curve,
                             const std::vector<BinRange>& ranges,
                             std::span<const SurveyedLine> lines) {
  const bool magnitude = spectrum.complex && !spectrum.phase;
  std::vector<BinRange> taken;
  for (const SurveyedLine& line : lines) {
    // Out to where the line's foot is below the noise: a magnitude falls as
    // 1/offset, absorption as 1/offset^2.
    const double height = std::max(line.line.height, 1.0);
    const double reach = std::max(3.0, magnitude ? height / 2 : std::sqrt(height) / 2) *
                         line.line.width_hz / spectrum.axis.hz_per_bin;
    taken.push_back({static_cast<std::ptrdiff_t>(line.line.bin - reach),
                     static_cast<std::ptrdiff_t>(line.line.bin + reach)});
  }
  const auto stride = std::max<std::ptrdiff_t>(
      1, static_cast<std::ptrdiff_t>(std::floor(0.5 / spectrum.fill_ratio)));
  std::vector<float> readings;
  for (const BinRange& range : ranges) {
    for (std::ptrdiff_t j = range.first; j <= range.last; j += stride) {
      if (Contains(taken, static_cast<double>(j))) continue;
      readings.push_back(static_cast<float>(curve[static_cast<std::size_t>(j)]));
    }
  }
  return readings;
}

// `lines` by falling height, then `others` by falling evidence.
void Rank(std::vector<const Line*>& lines, std::vector<const Line*>& others) {
  std::stable_sort(lines.begin(), lines.end(),
                   [](const Line* a, const Line* b) { return a->height > b->height; });
  std::stable_sort(others.begin(), others.end(),
                   [](const Line* a, const Line* b) { return a->log_evidence > b->log_evidence; });
  lines.insert(lines.end(), others.begin(), others.end());
}

// An unconfirmed requirement: no number, an upper limit.
void SetUnseen(Requirement& requirement, std::span<const float> readings, int quadratures) {
  requirement.posterior = AmplitudePosterior::OfUnseen(readings, quadratures);
  requirement.reading.estimate = 0;
  requirement.reading.lower = 0;
  requirement.reading.upper = requirement.posterior.Quantile(kUpper);
}

void SetSeen(Requirement& requirement, const Line& line, const SurveyOptions& options) {
  requirement.confirmed = true;
  requirement.line = line;
  requirement.reading = ReadingOf(line.height, line.chosen, options.noise_deviation);
  requirement.posterior =
      AmplitudePosterior::OfLine(line.height, line.chosen, requirement.reading.deviation);
}

}  // namespace

Reading ReadingOf(double z, double chosen, double noise_deviation) {
  Reading reading;
  reading.deviation = std::hypot(1.0, z * noise_deviation);
  reading.estimate = std::sqrt(std::max(z * z - chosen, 0.0));
  const double variance = reading.deviation * reading.deviation;
  if (z > kPlainlyNormal * reading.deviation) {
    // Far from zero a^(-c/2) exp(-(a-z)^2/(2 s^2)) is normal about its top, with
    // the curvature it has there.
    const double top = z - 0.5 * chosen * variance / z;
    const double half =
        kNormal95 * reading.deviation / std::sqrt(1 - 0.5 * chosen * variance / (top * top));
    reading.lower = top - half;
    reading.upper = top + half;
    return reading;
  }
  const auto posterior = AmplitudePosterior::OfLine(z, chosen, reading.deviation);
  reading.lower = posterior.Quantile(kLower);
  reading.upper = posterior.Quantile(kUpper);
  return reading;
}

Survey LookAt(const ScaledSpectrum& spectrum, std::span<const double> curve,
              std::span<const Line> lines, const SurveyOptions& options) {
  Survey survey;
  const double everywhere_level =
      std::log(2 * static_cast<double>(CountOf(*options.everywhere)) / options.false_confirmation);
  const auto window_of = [&](double bin) {
    for (std::size_t w = 0; w < options.windows->size(); ++w) {
      if (Contains((*options.windows)[w], bin)) return static_cast<int>(w);
    }
    return -1;
  };
  const auto window_level = [&](int window) {
    const double share =
        0.5 * options.false_confirmation / static_cast<double>(options.windows->size());
    return std::log(
        static_cast<double>(CountOf((*options.windows)[static_cast<std::size_t>(window)])) / share);
  };

  // What is confirmed now comes first, by height; then the rest, by evidence: a
  // high peak on another line's foot has little of its own.
  std::vector<const Line*> ranked;
  std::vector<const Line*> rest;
  std::vector<std::vector<const Line*>> in_window(options.windows->size());
  std::vector<std::vector<const Line*>> rest_of_window(options.windows->size());
  survey.confirmed_windows.assign(options.windows->size(), false);
  for (std::size_t w = 0; w < options.confirmed_windows.size() && w < in_window.size(); ++w) {
    survey.confirmed_windows[w] = options.confirmed_windows[w];
  }
  for (const Line& line : lines) {
    if (!Contains(*options.everywhere, static_cast<double>(line.nearest_bin))) continue;
    survey.strongest = std::max(survey.strongest, line.height);
    const int window = window_of(static_cast<double>(line.nearest_bin));
    bool confirmed = line.log_evidence >= everywhere_level;
    if (window >= 0) {
      const auto w = static_cast<std::size_t>(window);
      const bool in_its_window = line.log_evidence >= window_level(window);
      (in_its_window ? in_window : rest_of_window)[w].push_back(&line);
      if (in_its_window) {
        confirmed = true;
        survey.confirmed_windows[w] = true;
      }
    }
    (confirmed ? ranked : rest).push_back(&line);
    if (confirmed) {
      survey.lines.push_back(
          {line, ReadingOf(line.height, line.chosen, options.noise_deviation), window});
    }
  }
  // Applying the phase can have changed places.
  std::stable_sort(
      survey.lines.begin(), survey.lines.end(),
      [](const SurveyedLine& a, const SurveyedLine& b) { return a.line.height > b.line.height; });
  Rank(ranked, rest);
  for (std::size_t w = 0; w < in_window.size(); ++w) Rank(in_window[w], rest_of_window[w]);
  // Once confirmed, always confirmed: evidence was there, that is what counts.
  survey.confirmed_lines =
      std::max(options.confirmed_lines, static_cast<std::uint32_t>(survey.lines.size()));

  if (options.lines_wanted > 0) {
    Requirement requirement;
    const std::size_t index = options.lines_wanted - 1;
    if (survey.confirmed_lines > index && ranked.size() > index) {
      SetSeen(requirement, *ranked[index], options);
    } else {
      if (ranked.size() > survey.lines.size()) requirement.line = *ranked[survey.lines.size()];
      SetUnseen(requirement, EmptyBins(spectrum, curve, *options.everywhere, survey.lines),
                spectrum.quadratures() == 2 && !spectrum.phase ? 2 : 1);
    }
    survey.requirements.push_back(std::move(requirement));
    return survey;
  }
  for (std::size_t w = 0; w < in_window.size(); ++w) {
    Requirement requirement;
    requirement.window = static_cast<int>(w);
    const Line* best = in_window[w].empty() ? nullptr : in_window[w].front();
    if (survey.confirmed_windows[w] && best != nullptr) {
      SetSeen(requirement, *best, options);
    } else {
      if (best != nullptr) requirement.line = *best;
      SetUnseen(requirement, EmptyBins(spectrum, curve, (*options.windows)[w], survey.lines),
                spectrum.quadratures() == 2 && !spectrum.phase ? 2 : 1);
    }
    requirement.window = static_cast<int>(w);
    survey.requirements.push_back(std::move(requirement));
  }
  return survey;
}

}  // namespace lastscan::engine
