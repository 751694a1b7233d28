// Replays a finished accumulation as if it were still running.
//
// Given the final FID F(N) of N scans, the partial sums of a run with
// independent noise are exactly distributed as
//   F(n) = (n/N) F(N) + b(n),
// b a Brownian bridge from 0 at n = 0 to 0 at n = N, whose increments have the
// noise level and noise spectrum measured in F(N).
#pragma once

#include <cstdint>
#include <random>
#include <vector>

#include "formats/recording.h"
#include "rehearsal/measured_noise.h"

namespace lastscan::rehearsal {

class Retrace {
 public:
  // REQUIRES: finished.snapshot.scans_done >= 2. Throws as MeasureNoise does.
  // Accumulation may be SUM or MEAN; the partial recordings have the same.
  Retrace(formats::Recording finished, std::uint64_t seed);

  // The recording as it might have stood after `scans` scans: the finished one
  // but for samples and scans_done; its time is the caller's to set. At the
  // final count it is the finished recording itself, sample for sample.
  // REQUIRES: scans greater than at the call before, at most the final count.
  formats::Recording AdvanceTo(std::uint64_t scans);

  const MeasuredNoise& noise() const { return noise_; }

 private:
  formats::Recording finished_;
  MeasuredNoise noise_;
  std::mt19937_64 random_;
  std::uint64_t scans_done_ = 0;
  std::vector<double> bridge_;  // of the sum, at scans_done_
};

// `looks` scan counts from the first look to `total`, as even as whole numbers
// allow, the last one `total`; all of 1..total where that is fewer.
// REQUIRES: looks >= 1, total >= 1.
std::vector<std::uint64_t> EvenLooks(std::uint64_t total, int looks);

}  // namespace lastscan::rehearsal
