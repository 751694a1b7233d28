// What is known of the true signal-to-noise `a` of a line, as a density on a
// grid, with a flat prior on a >= 0.
//
// A height read at the top of a window is read at a position, and often a
// phase, chosen from the same data. Averaging the likelihood over what was
// chosen, p(a) ~ sum_j exp(a X_j - a^2/2) over positions j (and over phase,
// which turns exp(a X) into I0(a |X|)), leaves p(a) ~ a^(-c/2) exp(-(a-z)^2/2)
// around a line that stands out, c the number of quantities chosen: Laplace's
// method on the sum. Its centre lies near sqrt(z^2 - c).
#pragma once

#include <functional>
#include <span>
#include <vector>

namespace lastscan::engine {

class AmplitudePosterior {
 public:
  // Of a line that stands out: read as `z`, after `chosen` quantities were
  // chosen, standard deviation `deviation` (1 when the noise is known exactly).
  static AmplitudePosterior OfLine(double z, double chosen, double deviation);

  // Of a line that may hide anywhere among `readings` (z of bins, magnitudes
  // when `quadratures` is 2): the sum above, in full.
  static AmplitudePosterior OfUnseen(std::span<const float> readings, int quadratures);

  double Quantile(double probability) const;

  // Mean of `value` over the density.
  double Expect(const std::function<double(double)>& value) const;

  // The same of a value that depends on what the line reads now, too: called
  // with the true signal-to-noise and the mean reading at the places where a
  // line so strong would hide. REQUIRES: made by OfUnseen.
  double Expect(const std::function<double(double, double)>& value) const;

 private:
  void Normalise();

  double first_ = 0;
  double step_ = 0;
  std::vector<double> density_;     // per grid point, sums to 1
  std::vector<double> cumulative_;  // up to the middle of each point's cell
  std::vector<double> readings_;    // OfUnseen: mean reading of a line so strong
};

}  // namespace lastscan::engine
