// Reads the raw samples of a snapshot out of their frame.
#pragma once

#include <complex>
#include <string_view>
#include <vector>

#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

// Bytes that the frame of this snapshot must have; 0 if domain or encoding is
// not one we know.
std::size_t FrameBytes(const v1::Snapshot& snapshot);

// The accumulated (summed) samples, `snapshot.points` of them; a mean is turned
// back into a sum. An FID comes out so that a positive frequency is a higher
// shift; a spectrum (imaginary parts zero) runs with rising shift.
// REQUIRES: samples.size() == FrameBytes(snapshot).
// Throws Refusal if a sample is not finite, naming the first such point.
std::vector<std::complex<double>> SummedSamples(const v1::Snapshot& snapshot,
                                                std::string_view samples);

}  // namespace lastscan::engine
