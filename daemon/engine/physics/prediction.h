// What a sample's facts say of its signal before the first scan:
//   signal per scan = probe reference x nuclei in the coil x polarization
//                     x excitation x enhancement / width.
// The probe reference, a measurement on a sample of known facts, sets the
// absolute scale, so only ratios are worked out here.
#pragma once

#include <optional>
#include <string>
#include <vector>

#include "engine/physics/nuclides.h"
#include "lastscan/v1/snapshot.pb.h"

namespace lastscan::engine {

// What is known beside the sample's own facts.
struct Conditions {
  double observe_frequency_mhz = 0;
  double temperature_k = 298.15;
  double broadening_hz = 0;     // exponential, of the spectrum that is read
  double enhancement = 1;       // Overhauser factor or transfer; its size counts
  double natural_width_hz = 1;  // where the facts state no line width
};

// The factors of one sample's signal, and what had to be assumed for them.
struct SignalFactors {
  double nuclei_mmol_per_l = 0;  // observed nuclei behind the line
  double polarization = 0;       // 0..1
  double excitation = 1;         // transverse over equilibrium magnetization
  double enhancement = 1;
  double width_hz = 1;               // line width with broadening
  std::vector<std::string> assumed;  // in words, for the operator

  // Height of the line of one scan, in units that two samples share that are
  // observed by the same probe, on the same nuclide, with the same broadening.
  double SignalPerScan() const {
    return nuclei_mmol_per_l * polarization * excitation * enhancement / width_hz;
  }
};

// Concentration of the molecule in mmol/l: as stated, else from mass, molar mass
// and volume; empty where the facts do not hold it.
std::optional<double> ConcentrationOf(const v1::SampleFacts& facts);

// The factors of a sample; empty where its concentration is not known.
// Throws Refusal for a fact that cannot be true, naming it.
std::optional<SignalFactors> FactorsOf(const v1::SampleFacts& facts, const Nuclide& nuclide,
                                       const Conditions& conditions);

// A measurement on a standard sample: the probe's absolute scale.
struct ProbeReference {
  SignalFactors factors;
  double signal_to_noise_per_scan = 0;  // height over rms
};

// Expected height over rms of one scan. REQUIRES: both of the same probe,
// nuclide and broadening; the reference's signal is not 0.
double PredictedSignalToNoisePerScan(const SignalFactors& sample, const ProbeReference& reference);

}  // namespace lastscan::engine
