#include "engine/spectrum/phase.h"

#include <Eigen/Dense>
#include <algorithm>
#include <cmath>
#include <numbers>

namespace lastscan::engine {
namespace {

constexpr double kTwoPi = 2 * std::numbers::pi;
constexpr double kLongestDelay = 256;  // points
constexpr double kOnsetReach = 12;     // points around the onset that are searched
constexpr double kWeakest = 8;         // a line below this says little of phase
constexpr double kHeaviest = 60;       // stronger lines are not trusted further:
                                       // their phases scatter for other reasons
constexpr double kStep = 0.1;          // points of delay, 0.3 rad at the ends of the spectrum

// Weight of a line: 1 / variance of its phase, no more than what imperfect shim
// and overlap leave. Phase and place of a line come from the same data, which
// doubles the variance of the phase: the inverse Fisher matrix of a decaying
// exponential in phase and frequency has 2/z^2 where a known frequency has 1/z^2.
double Weight(const LinePhase& line) {
  const double z = std::min(std::abs(line.reading), kHeaviest);
  return 0.5 * z * z;
}

struct Fit {
  double delay = 0;
  double constant = 0;
  double misfit = 0;  // sum w (2 - 2 cos residual), about chi-square
};

// The fits at `count` delays from `first` on, `step` apart. The phasors of the
// lines are turned from one delay to the next, not computed anew.
std::vector<Fit> FitsAtDelays(const Axis& axis, std::span<const LinePhase> lines, double first,
                              double step, int count) {
  const double per_point = kTwoPi / static_cast<double>(axis.bins);
  const double middle = static_cast<double>(axis.bins / 2);
  std::vector<std::complex<double>> phasors;
  std::vector<std::complex<double>> turns;
  double total = 0;
  for (const LinePhase& line : lines) {
    const double slope = per_point * (line.bin - middle);
    phasors.push_back(std::polar(Weight(line), std::arg(line.reading) + first * slope));
    turns.push_back(std::polar(1.0, step * slope));
    total += Weight(line);
  }
  std::vector<Fit> fits;
  for (int i = 0; i < count; ++i) {
    std::complex<double> sum = 0;
    for (std::size_t l = 0; l < phasors.size(); ++l) {
      sum += phasors[l];
      phasors[l] *= turns[l];
    }
    fits.push_back({first + i * step, std::arg(sum), 2 * (total - std::abs(sum))});
  }
  return fits;
}

const Fit& Best(const std::vector<Fit>& fits) {
  return *std::min_element(fits.begin(), fits.end(),
                           [](const Fit& a, const Fit& b) { return a.misfit < b.misfit; });
}

Eigen::Vector2d Regressor(const LinePhase& line, double centre, double scale) {
  return {1.0, (line.bin - centre) / scale};
}

}  // namespace

std::optional<double> OnsetOfFid(std::span<const std::complex<double>> fid, double rms) {
  // Energy in blocks long enough to stand out: the level behind the onset is
  // read from the 64 points after the strongest block among the first 320.
  const std::size_t count = std::min<std::size_t>(fid.size() / 2, 320);
  if (count < 96) return std::nullopt;
  double strongest = 0;
  for (std::size_t t = 0; t + 8 <= count; ++t) {
    double energy = 0;
    for (std::size_t i = 0; i < 8; ++i) energy += std::norm(fid[t + i]);
    strongest = std::max(strongest, energy / 8);
  }
  if (strongest < 100 * rms * rms) return std::nullopt;
  // The step response of a symmetric filter crosses half height at the delay;
  // half height is a quarter of the energy.
  for (std::size_t t = 0; t < count; ++t) {
    const double energy = std::norm(fid[t]);
    if (energy < 0.25 * strongest) continue;
    if (t == 0) return 0.0;
    const double before = std::abs(fid[t - 1]);
    const double at = std::abs(fid[t]);
    const double half = 0.5 * std::sqrt(strongest);
    return static_cast<double>(t) - (at - half) / std::max(at - before, 1e-300);
  }
  return std::nullopt;
}

std::optional<PhaseModel> FitPhase(const Axis& axis, std::span<const LinePhase> all,
                                   std::optional<double> given_delay, std::optional<double> onset) {
  std::vector<LinePhase> lines;
  for (const LinePhase& line : all) {
    if (std::abs(line.reading) >= kWeakest) lines.push_back(line);
  }
  if (lines.empty()) return std::nullopt;
  const auto model = [&](const Fit& fit) {
    return PhaseModel{fit.constant, fit.delay, -kTwoPi * fit.delay / static_cast<double>(axis.bins),
                      axis.bins / 2};
  };
  // Residual phases are judged leniently, 3 per line, for shim and overlap are
  // not in the model; a wrong delay misses by orders of magnitude.
  const auto acceptable = [&](const Fit& fit) {
    return fit.misfit <= 9 + 3 * static_cast<double>(lines.size());
  };
  if (given_delay) {
    const Fit fit = FitsAtDelays(axis, lines, *given_delay, 0, 1).front();
    if (!acceptable(fit)) return std::nullopt;
    return model(fit);
  }
  if (lines.size() < 3) return std::nullopt;
  const double low = onset ? std::max(0.0, *onset - kOnsetReach) : 0;
  const double high = onset ? *onset + kOnsetReach : kLongestDelay;
  const std::vector<Fit> fits =
      FitsAtDelays(axis, lines, low, kStep, static_cast<int>((high - low) / kStep) + 1);
  const Fit best = Best(FitsAtDelays(axis, lines, Best(fits).delay - kStep, kStep / 20, 41));
  if (!acceptable(best)) return std::nullopt;
  // A rival is any delay whose predicted phases differ from the best one's at
  // some line and that explains the lines nearly as well.
  const auto [first, last] =
      std::minmax_element(lines.begin(), lines.end(),
                          [](const LinePhase& a, const LinePhase& b) { return a.bin < b.bin; });
  const double spread = (last->bin - first->bin) / static_cast<double>(axis.bins);
  for (const Fit& fit : fits) {
    const bool differs = std::abs(fit.delay - best.delay) * spread > 0.5;
    if (differs && fit.misfit < best.misfit + 16) return std::nullopt;
  }
  return model(best);
}

std::vector<double> PhaseLeverages(std::span<const LinePhase> lines) {
  if (lines.size() < 2) return std::vector<double>(lines.size(), 1.0);
  double centre = 0;
  double total = 0;
  for (const LinePhase& line : lines) {
    centre += Weight(line) * line.bin;
    total += Weight(line);
  }
  centre /= total;
  double scale = 1;
  for (const LinePhase& line : lines) scale = std::max(scale, std::abs(line.bin - centre));
  Eigen::Matrix2d normal = Eigen::Matrix2d::Zero();
  for (const LinePhase& line : lines) {
    const Eigen::Vector2d x = Regressor(line, centre, scale);
    normal += Weight(line) * x * x.transpose();
  }
  normal(1, 1) += 1e-9 * total;  // lines on one spot leave the slope open
  const auto solver = normal.ldlt();
  std::vector<double> leverages;
  for (const LinePhase& line : lines) {
    const Eigen::Vector2d x = Regressor(line, centre, scale);
    leverages.push_back(std::clamp(Weight(line) * x.dot(solver.solve(x)), 0.0, 1.0));
  }
  return leverages;
}

}  // namespace lastscan::engine
