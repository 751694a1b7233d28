// Noise of a real, phased spectrum from its quiet stretches.
#include <algorithm>
#include <bit>
#include <boost/math/special_functions/gamma.hpp>
#include <cmath>
#include <complex>
#include <numbers>
#include <span>
#include <unsupported/Eigen/FFT>
#include <utility>

#include "rehearsal/measured_noise.h"
#include "rehearsal/noise_level.h"

namespace lastscan::rehearsal {
namespace {

using Complex = std::complex<double>;

constexpr double kPi = std::numbers::pi;
constexpr std::size_t kBands = MeasuredNoise::kBands;

constexpr std::size_t kShortest = 256;  // points read together; more where the
constexpr std::size_t kLongest = 1024;  // spectrum is zero-filled to many points
constexpr std::size_t kRipple = 7;      // half width of the median against ripples
constexpr std::size_t kSlowest = 3;     // lowest bins of a stretch: base line, feet
constexpr double kLoudest = 1.6;        // times the lower quartile: still quiet
constexpr double kFewestDegrees = 40;   // of freedom of a stretch's power, to tell it
                                        // from one with lines

// A strong line cut off at the end of its FID leaves a ripple of one period all
// over the spectrum: a spike in the power along the points. It is signal; what
// stands out of the median of its neighbourhood is put down to that median,
// which leaves the edge that zero filling makes where it is.
std::vector<double> WithoutRipples(const std::vector<double>& powers) {
  std::vector<double> clean(powers.size());
  const std::size_t last = powers.size() - 1;
  for (std::size_t i = 0; i <= last; ++i) {
    // Beyond half a cycle per point the spectrum is its own mirror image. So it
    // is below 0, but there it may rise steeply to its top: no median reaches over.
    const std::size_t reach = std::min({kRipple, i, last});
    std::vector<double> near;
    for (std::size_t j = i - reach; j <= i + reach; ++j) {
      near.push_back(powers[j <= last ? j : 2 * last - j]);
    }
    const double middle = Quantile(std::move(near), 0.5);
    clean[i] = powers[i] > 1.5 * middle ? middle : powers[i];
  }
  return clean;
}

// Power spectrum of a stretch without its straight-line trend, up to half a
// cycle per point, scaled so that its mean is the variance of the points.
std::vector<double> PowerAlong(std::span<const double> stretch) {
  const double count = static_cast<double>(stretch.size());
  const double middle = 0.5 * (count - 1);
  double mean = 0;
  double slope = 0;
  for (std::size_t i = 0; i < stretch.size(); ++i) {
    mean += stretch[i] / count;
    slope += stretch[i] * (static_cast<double>(i) - middle);
  }
  slope *= 12 / (count * (count * count - 1));
  std::vector<Complex> weighted(stretch.size());
  double power = 0;
  for (std::size_t i = 0; i < stretch.size(); ++i) {
    const double sine = std::sin(kPi * (static_cast<double>(i) + 0.5) / count);
    const double weight = sine * sine;
    weighted[i] = weight * (stretch[i] - mean - slope * (static_cast<double>(i) - middle));
    power += weight * weight;
  }
  std::vector<Complex> spectrum(stretch.size());
  Eigen::FFT<double> fft;
  fft.fwd(spectrum.data(), weighted.data(), static_cast<Eigen::Index>(stretch.size()));
  std::vector<double> powers(stretch.size() / 2 + 1);
  for (std::size_t i = 0; i < powers.size(); ++i) powers[i] = std::norm(spectrum[i]) / power;
  // The slowest bins hold base line and the feet of lines, less the trend taken
  // away; the noise there is that of the next ones.
  const double next = (powers[kSlowest] + powers[kSlowest + 1] + powers[kSlowest + 2]) / 3;
  std::fill(powers.begin(), powers.begin() + kSlowest, next);
  return powers;
}

struct Stretch {
  std::vector<double> powers;  // along the points
  double power = 0;            // their mean, ripples left out
};

// The mean power spectrum of the quiet ones among `stretches`, those below
// kLoudest times their lower quartile; marks them.
std::vector<double> MeanOfQuiet(const std::vector<Stretch>& stretches, std::vector<char>& quiet) {
  std::vector<double> powers;
  for (const Stretch& stretch : stretches) powers.push_back(stretch.power);
  const double loudest = kLoudest * Quantile(powers, 0.25);
  std::vector<double> mean(stretches.front().powers.size(), 0);
  double count = 0;
  for (std::size_t i = 0; i < stretches.size(); ++i) {
    quiet[i] = powers[i] <= loudest;
    if (!quiet[i]) continue;
    count += 1;
    for (std::size_t j = 0; j < mean.size(); ++j) mean[j] += stretches[i].powers[j];
  }
  for (double& value : mean) value /= count;
  return mean;
}

// What the stretches of one length say.
struct Stretches {
  std::size_t length = 0;
  std::vector<Stretch> all;  // each begins in the middle of the one before
  std::vector<char> quiet;
  std::vector<double> along_points;  // of the quiet ones, mean 1
  double degrees = 0;                // of freedom of the power of one
};

Stretches ReadStretches(const std::vector<double>& samples, std::size_t length) {
  Stretches read;
  read.length = length;
  read.all.resize((samples.size() - length) / (length / 2) + 1);
  for (std::size_t i = 0; i < read.all.size(); ++i) {
    read.all[i].powers = PowerAlong(std::span(samples).subspan(i * (length / 2), length));
    read.all[i].power = Mean(read.all[i].powers);
  }
  // Once to see where the ripples are, once more without them: they differ from
  // stretch to stretch, and hide which ones are quiet.
  read.quiet.resize(read.all.size());
  const std::vector<double> first = MeanOfQuiet(read.all, read.quiet);
  const std::vector<double> clean = WithoutRipples(first);
  double of_kept = 0;
  double of_all = 0;
  for (std::size_t j = 0; j < clean.size(); ++j) {
    of_all += clean[j];
    if (clean[j] == first[j]) of_kept += clean[j];
  }
  for (Stretch& stretch : read.all) {
    double kept = 0;
    for (std::size_t j = 0; j < clean.size(); ++j) {
      if (clean[j] == first[j]) kept += stretch.powers[j];
    }
    stretch.power = of_kept > 0 ? kept / static_cast<double>(clean.size()) * (of_all / of_kept) : 0;
  }
  read.along_points = WithoutRipples(MeanOfQuiet(read.all, read.quiet));
  const double mean = Mean(read.along_points);
  double squares = 0;
  for (double& value : read.along_points) {
    value = mean > 0 ? value / mean : 1;
    squares += value * value;
  }
  // The window takes half of the points, the likeness of neighbours its share.
  read.degrees =
      0.5 * static_cast<double>(length) * static_cast<double>(read.along_points.size()) / squares;
  return read;
}

// Powers of noise are gamma distributed; where a stretch holds few independent
// points they scatter so much that the loudest are taken for lines. Returns the
// true mean power over that of the quiet ones, from the mean of a gamma
// distribution cut off above.
double LossByCut(const Stretches& stretches) {
  std::vector<double> powers;
  double mean = 0;
  double count = 0;
  for (std::size_t i = 0; i < stretches.all.size(); ++i) {
    powers.push_back(stretches.all[i].power);
    if (!stretches.quiet[i]) continue;
    mean += stretches.all[i].power;
    count += 1;
  }
  mean /= count;
  if (!(mean > 0)) return 1;
  const double cut = kLoudest * Quantile(powers, 0.25) / mean;
  const double shape = stretches.degrees / 2;
  double loss = 1;
  for (int round = 0; round < 40; ++round) {
    const double at = shape * cut / loss;
    loss = std::min(2.0, boost::math::gamma_p(shape, at) / boost::math::gamma_p(shape + 1, at));
  }
  return loss;
}

}  // namespace

MeasuredNoise MeasureSpectrumNoise(const std::vector<double>& samples) {
  Stretches stretches = ReadStretches(
      samples, std::min(std::clamp(std::bit_floor(samples.size() / 128), kShortest, kLongest),
                        std::bit_floor(samples.size() / 4)));
  // Broadening and zero filling leave few independent points in a stretch.
  while (stretches.degrees < kFewestDegrees && 32 * stretches.length <= samples.size()) {
    stretches = ReadStretches(samples, 2 * stretches.length);
  }
  MeasuredNoise noise;
  noise.along_points = stretches.along_points;
  const double loss = LossByCut(stretches);
  // The overlap takes half of the degrees of freedom.
  const double independent = 0.5 * stretches.degrees;
  std::vector<double> sums(kBands, 0);
  std::vector<double> numbers(kBands, 0);
  for (std::size_t i = 0; i < stretches.all.size(); ++i) {
    if (!stretches.quiet[i]) continue;
    const std::size_t band = (i + 1) * (stretches.length / 2) * kBands / samples.size();
    sums[band] += loss * stretches.all[i].power;
    numbers[band] += 1;
  }
  std::vector<Level> bands(kBands);
  for (std::size_t i = 0; i < kBands; ++i) {
    if (numbers[i] == 0) continue;
    bands[i] = {sums[i] / numbers[i], std::sqrt(2 / std::max(1.0, independent * numbers[i]))};
  }
  const Level inside = InsidePassband(bands);
  noise.passband = PassbandOf(bands, inside);
  noise.rms = std::sqrt(inside.power * Mean(noise.passband));
  return noise;
}

}  // namespace lastscan::rehearsal
