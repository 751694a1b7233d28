#include "engine/physics/prediction.h"

#include <cmath>
#include <cstdio>
#include <numbers>

#include "engine/physics/polarization.h"
#include "engine/physics/steady_state.h"
#include "engine/refusal.h"

namespace lastscan::engine {
namespace {

std::string Number(double value) {
  char text[32];
  std::snprintf(text, sizeof text, "%.4g", value);
  return text;
}

void RequirePositive(double value, const char* what) {
  if (value > 0 && std::isfinite(value)) return;
  throw Refusal(std::string(what) + " of " + Number(value) +
                " cannot be true: give a number above 0, or leave it out");
}

void CheckFacts(const v1::SampleFacts& facts) {
  if (facts.has_concentration_mmol_per_l()) {
    RequirePositive(facts.concentration_mmol_per_l(), "a concentration (mmol/l)");
  }
  if (facts.has_mass_mg()) RequirePositive(facts.mass_mg(), "a mass (mg)");
  if (facts.has_molar_mass_g_per_mol()) {
    RequirePositive(facts.molar_mass_g_per_mol(), "a molar mass (g/mol)");
  }
  if (facts.has_volume_ul()) RequirePositive(facts.volume_ul(), "a volume (microlitres)");
  if (facts.has_equivalent_nuclei()) {
    RequirePositive(facts.equivalent_nuclei(), "a number of equivalent nuclei");
  }
  if (facts.has_repetition_time_s()) {
    RequirePositive(facts.repetition_time_s(), "a repetition time (s)");
  }
  if (facts.has_t1_s()) RequirePositive(facts.t1_s(), "a longitudinal relaxation time (s)");
  if (facts.has_line_width_hz()) RequirePositive(facts.line_width_hz(), "a line width (Hz)");
  if (facts.has_flip_angle_degrees() &&
      !(facts.flip_angle_degrees() > 0 && facts.flip_angle_degrees() < 180)) {
    throw Refusal("a flip angle of " + Number(facts.flip_angle_degrees()) +
                  " degrees gives no signal to predict: give one between 0 and 180");
  }
  if (facts.has_enrichment() && !(facts.enrichment() > 0 && facts.enrichment() <= 1)) {
    throw Refusal("an enrichment of " + Number(facts.enrichment()) +
                  " cannot be true: give a share above 0 and up to 1");
  }
}

// The excitation factor; says in `assumed` what the facts left open.
double ExcitationOf(const v1::SampleFacts& facts, std::vector<std::string>& assumed) {
  double flip = 90;
  if (facts.has_flip_angle_degrees()) {
    flip = facts.flip_angle_degrees();
  } else {
    assumed.push_back("a flip angle of 90 degrees");
  }
  if (facts.has_repetition_time_s() && facts.has_t1_s()) {
    return SteadyStateSignal(flip, facts.repetition_time_s(), facts.t1_s());
  }
  assumed.push_back("full relaxation between scans");
  return std::sin(flip * std::numbers::pi / 180);
}

}  // namespace

std::optional<double> ConcentrationOf(const v1::SampleFacts& facts) {
  if (facts.has_concentration_mmol_per_l()) return facts.concentration_mmol_per_l();
  if (facts.has_mass_mg() && facts.has_molar_mass_g_per_mol() && facts.has_volume_ul()) {
    // mg / (g/mol) = mmol; microlitres to litres: 1e-6.
    return facts.mass_mg() / facts.molar_mass_g_per_mol() / (facts.volume_ul() * 1e-6);
  }
  return std::nullopt;
}

std::optional<SignalFactors> FactorsOf(const v1::SampleFacts& facts, const Nuclide& nuclide,
                                       const Conditions& conditions) {
  CheckFacts(facts);
  RequirePositive(conditions.observe_frequency_mhz, "an observe frequency (MHz)");
  RequirePositive(conditions.temperature_k, "a temperature (K)");
  const std::optional<double> concentration = ConcentrationOf(facts);
  if (!concentration) return std::nullopt;

  SignalFactors factors;
  double equivalent = 1;
  if (facts.has_equivalent_nuclei()) {
    equivalent = facts.equivalent_nuclei();
  } else {
    factors.assumed.push_back("one nucleus in each molecule behind the line");
  }
  const double isotope = facts.has_enrichment() ? facts.enrichment() : nuclide.abundance;
  factors.nuclei_mmol_per_l = *concentration * equivalent * isotope;
  factors.polarization = Polarization(
      nuclide, FieldTesla(nuclide, conditions.observe_frequency_mhz), conditions.temperature_k);
  factors.excitation = ExcitationOf(facts, factors.assumed);
  factors.enhancement = std::abs(conditions.enhancement);
  double width = conditions.natural_width_hz;
  if (facts.has_line_width_hz()) {
    width = facts.line_width_hz();
  } else {
    factors.assumed.push_back("a line width of " + Number(width) + " Hz");
  }
  // Exponential weights add their width to a Lorentzian line.
  factors.width_hz = width + conditions.broadening_hz;
  return factors;
}

double PredictedSignalToNoisePerScan(const SignalFactors& sample, const ProbeReference& reference) {
  return reference.signal_to_noise_per_scan * sample.SignalPerScan() /
         reference.factors.SignalPerScan();
}

}  // namespace lastscan::engine
