// Predictions against ratios that every operator knows, and refusals of facts
// that cannot be true.
#include "engine/physics/prediction.h"

#include <gmock/gmock.h>
#include <gtest/gtest.h>

#include <cmath>
#include <string>

#include "engine/refusal.h"

namespace lastscan::engine {
namespace {

using ::testing::HasSubstr;
using ::testing::IsEmpty;
using ::testing::SizeIs;

const Nuclide& Carbon() { return *FindNuclide("13C"); }

Conditions Usual() {
  Conditions conditions;
  conditions.observe_frequency_mhz = 100.6;
  conditions.broadening_hz = 1;
  return conditions;
}

v1::SampleFacts FullFacts() {
  v1::SampleFacts facts;
  facts.set_concentration_mmol_per_l(50);
  facts.set_equivalent_nuclei(1);
  facts.set_flip_angle_degrees(30);
  facts.set_repetition_time_s(2.5);
  facts.set_t1_s(4);
  facts.set_line_width_hz(1);
  return facts;
}

double SignalOf(const v1::SampleFacts& facts, const Conditions& conditions = Usual()) {
  return FactorsOf(facts, Carbon(), conditions)->SignalPerScan();
}

// Twice the concentration needs a quarter of the scans: 5 mg with 64 scans equal
// 10 mg with 16 (common practice, no source).
TEST(Prediction, TwiceTheMassNeedsAQuarterOfTheScans) {
  v1::SampleFacts facts = FullFacts();
  facts.clear_concentration_mmol_per_l();
  facts.set_molar_mass_g_per_mol(300);
  facts.set_volume_ul(600);
  facts.set_mass_mg(5);
  const double of_five = SignalOf(facts) * std::sqrt(64.0);
  facts.set_mass_mg(10);
  EXPECT_NEAR(SignalOf(facts) * std::sqrt(16.0) / of_five, 1, 1e-12);
}

TEST(Prediction, MassAndVolumeMakeTheConcentration) {
  v1::SampleFacts facts;
  EXPECT_FALSE(ConcentrationOf(facts));
  facts.set_mass_mg(18.0);
  facts.set_molar_mass_g_per_mol(180.0);
  EXPECT_FALSE(ConcentrationOf(facts));
  facts.set_volume_ul(500);
  // 0.1 mmol in half a millilitre.
  EXPECT_NEAR(*ConcentrationOf(facts), 200, 1e-9);
  facts.set_concentration_mmol_per_l(3);
  EXPECT_EQ(*ConcentrationOf(facts), 3);
}

TEST(Prediction, EachFactorActsAsItShould) {
  const double usual = SignalOf(FullFacts());
  v1::SampleFacts facts = FullFacts();
  facts.set_equivalent_nuclei(3);
  EXPECT_NEAR(SignalOf(facts) / usual, 3, 1e-12);
  facts = FullFacts();
  facts.set_enrichment(0.99);
  EXPECT_NEAR(SignalOf(facts) / usual, 0.99 / 0.0107, 1e-9);
  facts = FullFacts();
  facts.set_line_width_hz(3);  // 4 Hz with broadening, against 2
  EXPECT_NEAR(SignalOf(facts) / usual, 0.5, 1e-12);
  // Polarization goes with field over temperature where it is small.
  Conditions conditions = Usual();
  conditions.observe_frequency_mhz = 201.2;
  EXPECT_NEAR(SignalOf(FullFacts(), conditions) / usual, 2, 1e-6);
  conditions = Usual();
  conditions.temperature_k = 2 * 298.15;
  EXPECT_NEAR(SignalOf(FullFacts(), conditions) / usual, 0.5, 1e-6);
  conditions = Usual();
  conditions.enhancement = LargestOverhauserFactor(*FindNuclide("15N"));
  EXPECT_NEAR(SignalOf(FullFacts(), conditions) / usual, 3.931, 0.001);
  // sin 30 (1 - E) / (1 - E cos 30), E = exp(-2.5/4) = 0.535261:
  // 0.5 x 0.464739 / 0.536450.
  EXPECT_NEAR(FactorsOf(FullFacts(), Carbon(), Usual())->excitation, 0.433161, 1e-6);
}

TEST(Prediction, ReferenceSetsTheScale) {
  v1::SampleFacts standard = FullFacts();
  standard.set_concentration_mmol_per_l(1000);
  const ProbeReference reference{*FactorsOf(standard, Carbon(), Usual()), 8.0};
  const auto sample = *FactorsOf(FullFacts(), Carbon(), Usual());
  EXPECT_NEAR(PredictedSignalToNoisePerScan(sample, reference), 8.0 * 50 / 1000, 1e-12);
}

TEST(Prediction, SaysWhatItAssumed) {
  EXPECT_THAT(FactorsOf(FullFacts(), Carbon(), Usual())->assumed, IsEmpty());
  v1::SampleFacts facts;
  facts.set_concentration_mmol_per_l(50);
  const auto factors = *FactorsOf(facts, Carbon(), Usual());
  EXPECT_THAT(factors.assumed, SizeIs(4));
  EXPECT_EQ(factors.excitation, 1);
  EXPECT_EQ(factors.width_hz, 2);
  EXPECT_FALSE(FactorsOf(v1::SampleFacts(), Carbon(), Usual()));
}

TEST(Prediction, RefusesWhatCannotBeTrue) {
  const auto refusal = [](auto change) -> std::string {
    v1::SampleFacts facts = FullFacts();
    change(facts);
    try {
      FactorsOf(facts, Carbon(), Usual());
    } catch (const Refusal& refused) {
      return refused.what();
    }
    return "";
  };
  EXPECT_THAT(refusal([](auto& f) { f.set_concentration_mmol_per_l(-1); }),
              HasSubstr("concentration"));
  EXPECT_THAT(refusal([](auto& f) { f.set_mass_mg(NAN); }), HasSubstr("mass"));
  EXPECT_THAT(refusal([](auto& f) { f.set_molar_mass_g_per_mol(0); }), HasSubstr("molar mass"));
  EXPECT_THAT(refusal([](auto& f) { f.set_volume_ul(INFINITY); }), HasSubstr("volume"));
  EXPECT_THAT(refusal([](auto& f) { f.set_enrichment(1.1); }), HasSubstr("enrichment"));
  EXPECT_THAT(refusal([](auto& f) { f.set_flip_angle_degrees(180); }), HasSubstr("flip angle"));
  EXPECT_THAT(refusal([](auto& f) { f.set_t1_s(0); }), HasSubstr("relaxation time"));
  EXPECT_THAT(refusal([](auto& f) { f.set_repetition_time_s(-2); }), HasSubstr("repetition"));
  EXPECT_THAT(refusal([](auto& f) { f.set_line_width_hz(0); }), HasSubstr("line width"));
  EXPECT_THAT(refusal([](auto& f) { f.set_equivalent_nuclei(0); }), HasSubstr("equivalent"));
  EXPECT_EQ(refusal([](auto&) {}), "");
  Conditions nowhere;
  EXPECT_THROW(FactorsOf(FullFacts(), Carbon(), nowhere), Refusal);
}

}  // namespace
}  // namespace lastscan::engine
