// The amplitude per scan of the reference lines through a run, increment by
// increment, and the test whether it has changed.
//
// Once lines stand out, their complex heights are frozen as a reference; each
// later increment is projected on it, which is the best linear estimate of a
// common change. Blocks are merged in pairs when there are too many, so that
// memory stays the same however long the run.
#pragma once

#include <complex>
#include <optional>
#include <span>
#include <vector>

#include "engine/state.pb.h"

namespace lastscan::engine {

struct AmplitudeChange {
  double ratio = 1;  // amplitude after over amplitude before
  double since_scan = 0;
  double significance = 0;  // standard deviations
};

class AmplitudeHistory {
 public:
  static constexpr std::size_t kMostBlocks = 64;

  bool started() const { return !reference_.empty(); }

  // Freezes the reference: line bins, and the accumulation at them after `scans`
  // scans. `noise_per_scan` is the rms per quadrature. `quadratures`: 1 or 2.
  void Start(std::span<const std::ptrdiff_t> bins,
             std::span<const std::complex<double>> accumulation, double scans,
             double noise_per_scan, int quadratures);

  // Takes the accumulation before and after an increment. Returns the relative
  // amplitude per scan of the increment (1: as at the start).
  // REQUIRES: started().
  double Add(std::span<const std::complex<float>> before,
             std::span<const std::complex<double>> after, double scans_before, double scans_after);

  // Standard deviation of the relative amplitude of `scans` scans.
  double DeviationOf(double scans) const;

  // The most significant split of the history in two, with at least
  // `least_significance`; empty when there is none.
  std::optional<AmplitudeChange> Change(double least_significance) const;

  void SaveTo(state::Run& state) const;
  void RestoreFrom(const state::Run& state);

 private:
  struct Reference {
    std::ptrdiff_t bin;
    std::complex<double> height;  // per scan
  };
  struct Block {
    double last_scan;
    double scans;
    double amplitude;  // relative, times scans
  };

  std::vector<Reference> reference_;
  std::vector<Block> blocks_;
  double deviation_ = 0;  // of the relative amplitude of one scan
  double power_ = 1;      // sum |height|^2, freed of the noise that went into it
};

}  // namespace lastscan::engine
