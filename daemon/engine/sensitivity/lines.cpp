#include "engine/sensitivity/lines.h"

#include <algorithm>
#include <cmath>
#include <numbers>

#include "engine/spectrum/interpolation.h"

namespace lastscan::engine {
namespace {

constexpr std::size_t kMostPeaks = 512;  // a spectrum with more is read by its strongest
constexpr double kDecayed = 5;           // width times length of an FID without ripple
constexpr std::size_t kMostFeet = 64;    // those of the strongest lines

// How the foot of a line falls off: as 1/offset^2 in phase, as 1/offset in a
// magnitude. An FID cut off before it has decayed adds ripple that falls as
// 1/offset: from dip to top 2 c/(1-c) of the height at the line, c the share of
// the signal that is left at the end.
struct Foot {
  double bin;
  double height;  // that the line would have if its FID were not cut off
  double ripple;  // dip to top, at the line
  double decay;   // of the line, broadening included, per second

  // The line's shape at another bin, 1 at its own. The spectrum is periodic.
  double FallTo(double bin_there, const Axis& axis) const {
    const double width = axis.hz_per_bin * static_cast<double>(axis.bins);
    const double turn = std::numbers::pi * (bin - bin_there) / static_cast<double>(axis.bins);
    const double radians = 2 * width * std::sin(turn);
    return decay / std::sqrt(decay * decay + radians * radians);
  }
};

// The decay of a line, times the FID's length `seconds`, that makes its width at
// half height `width_hz`: a cut-off FID is broader than its decay alone. Of
// s = (1 - c exp(-i w T))/(d + i w) the power falls to half in a magnitude, the
// real part in a reading in phase.
double DecayOverFid(double width_hz, double seconds, bool magnitude) {
  const double angle = std::numbers::pi * width_hz * seconds;
  const auto too_wide = [&](double decay) {
    const double left = std::exp(-decay);
    const double scale = decay / (1 - left);
    const double squares = decay * decay + angle * angle;
    if (magnitude) {
      return scale * scale * (1 + left * left - 2 * left * std::cos(angle)) > 0.5 * squares;
    }
    return scale * (decay * (1 - left * std::cos(angle)) + angle * left * std::sin(angle)) >
           0.5 * squares;
  };
  double low = 1e-3;
  double high = std::max(angle, 2 * low);
  for (int round = 0; round < 24; ++round) {
    const double middle = 0.5 * (low + high);
    (too_wide(middle) ? high : low) = middle;
  }
  return low;
}

// Width at half height of a Lorentzian, from where the power (magnitudes) or
// the curve (real readings) falls to half, interpolated on both sides.
double WidthInBins(std::span<const double> curve, std::ptrdiff_t bin, double height,
                   bool magnitude) {
  const double half = magnitude ? height * std::numbers::sqrt2 / 2 : height / 2;
  const auto count = static_cast<std::ptrdiff_t>(curve.size());
  double width = 0;
  for (int direction : {-1, 1}) {
    std::ptrdiff_t j = bin;
    while (j + direction >= 0 && j + direction < count &&
           curve[static_cast<std::size_t>(j)] > half) {
      j += direction;
    }
    const double inner = curve[static_cast<std::size_t>(j - (j == bin ? 0 : direction))];
    const double outer = curve[static_cast<std::size_t>(j)];
    const double back = inner > outer ? (half - outer) / (inner - outer) : 0;
    width += std::abs(static_cast<double>(j - bin)) - std::clamp(back, 0.0, 1.0);
  }
  return std::max(width, 0.5);
}

double HeightAt(const ScaledSpectrum& spectrum, double bin, std::complex<double> value) {
  if (!spectrum.phase) return std::abs(value);
  return (value * std::polar(1.0, -spectrum.phase->At(bin))).real();
}

// Climbs from the highest bin to the top between the bins; the top of the
// reading in phase, or of the magnitude where the phase is not known.
void Climb(const ScaledSpectrum& spectrum, Line& line) {
  const auto value_at = [&](double bin) {
    return ValueBetweenBins(spectrum.bins, spectrum.fill_ratio, bin) / spectrum.unit;
  };
  double best = static_cast<double>(line.nearest_bin);
  double span = 0.5;
  std::complex<double> value = value_at(best);
  double height = HeightAt(spectrum, best, value);
  for (int round = 0; round < 3; ++round, span /= 4) {
    const double below = HeightAt(spectrum, best - span, value_at(best - span));
    const double above = HeightAt(spectrum, best + span, value_at(best + span));
    const double curvature = below - 2 * height + above;
    if (!(curvature < 0)) break;
    const double candidate =
        best + std::clamp(0.5 * span * (below - above) / curvature, -1.5 * span, 1.5 * span);
    const std::complex<double> there = value_at(candidate);
    const double reached = HeightAt(spectrum, candidate, there);
    if (reached <= height) continue;
    best = candidate;
    value = there;
    height = reached;
  }
  line.bin = best;
  line.reading = value;
  line.height = height;
}

void Refine(const ScaledSpectrum& spectrum, std::span<const double> curve, Line& line) {
  if (spectrum.complex) return Climb(spectrum, line);
  const auto j = static_cast<std::size_t>(line.nearest_bin);
  const double left = j > 0 ? curve[j - 1] : curve[j];
  const double right = j + 1 < curve.size() ? curve[j + 1] : curve[j];
  const Maximum top = TopOfThree(left, curve[j], right, static_cast<double>(j));
  line.bin = top.bin;
  line.height = top.height;
  line.reading = top.height;
}

}  // namespace

std::vector<double> ReadingCurve(const ScaledSpectrum& spectrum) {
  std::vector<double> curve(spectrum.bins.size());
  const double scale = 1 / spectrum.unit;
  if (!spectrum.complex) {
    for (std::size_t j = 0; j < curve.size(); ++j) curve[j] = spectrum.bins[j].real() * scale;
  } else if (!spectrum.phase) {
    for (std::size_t j = 0; j < curve.size(); ++j) {
      curve[j] = std::sqrt(std::norm(spectrum.bins[j])) * scale;
    }
  } else {
    // exp(-i phase) by a recurrence restarted each 64 bins.
    const std::complex<double> step = std::polar(1.0, -spectrum.phase->radians_per_bin);
    std::complex<double> turn;
    for (std::size_t j = 0; j < curve.size(); ++j) {
      if (j % 64 == 0) turn = std::polar(scale, -spectrum.phase->At(static_cast<double>(j)));
      const std::complex<double>& bin = spectrum.bins[j];
      curve[j] = bin.real() * turn.real() - bin.imag() * turn.imag();
      turn = {turn.real() * step.real() - turn.imag() * step.imag(),
              turn.real() * step.imag() + turn.imag() * step.real()};
    }
  }
  return curve;
}

std::vector<Peak> FindPeaks(std::span<const double> curve, double least_height) {
  // Maxima seen so far of falling height; each keeps the lowest dip between it
  // and the next higher one before it. A dip towards the end of the spectrum
  // counts as a dip towards higher ground: a line may stand at the edge.
  struct Open {
    Peak peak;
    double left_dip;
    double dip_since;
  };
  std::vector<Open> open;
  std::vector<Peak> peaks;
  const auto close = [&](const Open& top) {
    if (top.peak.height < least_height) return;
    Peak peak = top.peak;
    peak.saddle = std::max({top.left_dip, top.dip_since, 0.0});
    peaks.push_back(peak);
  };
  double dip = curve.empty() ? 0 : curve[0];
  for (std::size_t j = 0; j < curve.size(); ++j) {
    dip = std::min(dip, curve[j]);
    const bool rises = j == 0 || curve[j] > curve[j - 1];
    const bool falls = j + 1 == curve.size() || curve[j] >= curve[j + 1];
    if (!rises || !falls || curve[j] < 0.5 * least_height) continue;
    double left_dip = dip;
    while (!open.empty() && open.back().peak.height <= curve[j]) {
      Open top = open.back();
      open.pop_back();
      top.dip_since = std::min(top.dip_since, left_dip);
      close(top);
      left_dip = std::min(left_dip, std::min(top.left_dip, top.dip_since));
    }
    if (!open.empty()) open.back().dip_since = std::min(open.back().dip_since, left_dip);
    open.push_back({{static_cast<std::ptrdiff_t>(j), curve[j], 0}, left_dip, curve[j]});
    dip = curve[j];
  }
  double after = dip;
  while (!open.empty()) {
    Open top = open.back();
    open.pop_back();
    top.dip_since = std::min(top.dip_since, after);
    after = std::min(after, top.dip_since);
    close(top);
  }
  std::sort(peaks.begin(), peaks.end(),
            [](const Peak& a, const Peak& b) { return a.height > b.height; });
  return peaks;
}

std::vector<Line> ReadLines(const ScaledSpectrum& spectrum, std::span<const double> curve,
                            std::span<const Peak> peaks, const MixtureEvidence& evidence) {
  const bool magnitude = spectrum.complex && !spectrum.phase;
  std::vector<Line> lines;
  std::vector<Foot> feet;
  for (const Peak& peak : peaks.first(std::min(peaks.size(), kMostPeaks))) {
    double foot = 0;
    double ripple = 0;
    for (const Foot& stronger : feet) {
      const double fall = stronger.FallTo(static_cast<double>(peak.bin), spectrum.axis);
      foot += stronger.height * (magnitude ? fall : fall * fall);
      ripple += stronger.ripple * fall;
    }
    // Noise riding on a foot dips by up to three rms between its tops; only
    // what rises above that is the line's own. On a low foot it dips to zero,
    // and the stronger lines tell how high it is.
    const double stands_on =
        std::max(peak.saddle + std::min(peak.saddle, 3.0), std::min(foot, peak.saddle + 3.0));
    const double own = peak.height - stands_on;
    if (own <= 2 * ripple || own <= 0) continue;

    Line line;
    line.nearest_bin = peak.bin;
    line.bin = static_cast<double>(peak.bin);
    line.height = peak.height;
    line.reading = spectrum.bins[static_cast<std::size_t>(peak.bin)] / spectrum.unit;
    // Ripple of the noise is not worth a reading between the bins.
    if (evidence.LogEvidence(own) > 0) Refine(spectrum, curve, line);
    line.width_hz = WidthInBins(curve, peak.bin, line.height, magnitude) * spectrum.axis.hz_per_bin;
    line.chosen = spectrum.complex ? 2 : 1;

    // Evidence summed over the line's bins, at the height that is its own.
    const auto count = static_cast<std::ptrdiff_t>(curve.size());
    double sum = 0;
    const double top = evidence.LogEvidence(own);
    for (int direction : {-1, 1}) {
      for (std::ptrdiff_t j = direction < 0 ? peak.bin : peak.bin + 1;
           j >= 0 && j < count && curve[static_cast<std::size_t>(j)] > 0.5 * peak.height;
           j += direction) {
        const auto index = static_cast<std::size_t>(j);
        const double z =
            spectrum.complex ? std::abs(spectrum.bins[index]) / spectrum.unit : curve[index];
        // Never more than the top bin gives: phase must not add evidence.
        const double less = std::max(std::min(z, peak.height) - stands_on, 0.0);
        sum += std::exp(std::min(evidence.LogEvidence(less) - top, 0.0));
      }
    }
    line.log_evidence = top + std::log(std::max(sum, 1e-300));

    lines.push_back(line);

    if (feet.size() == kMostFeet) continue;
    const double seconds = spectrum.acquisition_seconds;
    const double height = line.height - stands_on;
    Foot own_foot{line.bin, height, 0, std::numbers::pi * line.width_hz};
    if (seconds > 0 && line.width_hz * seconds < kDecayed) {
      const double decay = DecayOverFid(line.width_hz, seconds, magnitude);
      const double left = std::exp(-decay);
      own_foot = {line.bin, height / (1 - left), 2 * height * left / (1 - left), decay / seconds};
    }
    feet.push_back(own_foot);
  }
  // Reading between the bins can change places.
  std::stable_sort(lines.begin(), lines.end(),
                   [](const Line& a, const Line& b) { return a.height > b.height; });
  return lines;
}

LinePhase PhaseOf(const ScaledSpectrum& spectrum, const Line& line) {
  ScaledSpectrum magnitudes = spectrum;
  magnitudes.phase.reset();
  const auto count = static_cast<std::ptrdiff_t>(spectrum.bins.size());
  const auto power = [&](std::ptrdiff_t bin) {
    return std::norm(spectrum.bins[static_cast<std::size_t>(bin)]);
  };
  Line top = line;
  for (const int direction : {-1, 1}) {
    while (top.nearest_bin + direction >= 0 && top.nearest_bin + direction < count &&
           power(top.nearest_bin + direction) > power(top.nearest_bin)) {
      top.nearest_bin += direction;
    }
  }
  Climb(magnitudes, top);
  return {top.bin, top.reading};
}

void ApplyPhase(const PhaseModel& phase, std::span<const LinePhase> fitted, std::span<Line> lines) {
  const std::vector<double> leverages = PhaseLeverages(fitted);
  for (Line& line : lines) {
    const double own = std::arg(line.reading * std::polar(1.0, -phase.At(line.bin)));
    // 0.15 rad is 1 % of height: what shim and overlap do to a line's phase.
    if (std::abs(own) > 0.15 + 3 / std::max(line.height, 1.0)) {
      line.height = std::abs(line.reading);
      line.chosen = 2;
      continue;
    }
    // A fitted line's place is that of its magnitude, less than a width away.
    line.chosen = 1;
    for (std::size_t i = 0; i < fitted.size(); ++i) {
      if (std::abs(fitted[i].bin - line.bin) < 2) line.chosen = 1 + leverages[i];
    }
  }
}

}  // namespace lastscan::engine
