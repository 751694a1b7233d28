// The table against itself and against numbers that were worked out apart from
// it: a misremembered digit shows where two columns disagree.
#include "engine/physics/nuclides.h"

#include <gtest/gtest.h>

#include <cmath>
#include <map>
#include <numbers>
#include <set>
#include <string>
#include <string_view>

namespace lastscan::engine {
namespace {

TEST(Nuclides, NamesAreUniqueAndFound) {
  std::set<std::string_view> names;
  for (const Nuclide& nuclide : Nuclides()) {
    EXPECT_TRUE(names.insert(nuclide.name).second) << nuclide.name;
    EXPECT_EQ(FindNuclide(nuclide.name), &nuclide);
  }
  EXPECT_EQ(names.size(), 17u);
  EXPECT_EQ(FindNuclide("14C"), nullptr);
  EXPECT_EQ(FindNuclide("13c"), nullptr);
}

TEST(Nuclides, SpinIsHalfWholeByMassNumber) {
  for (const Nuclide& nuclide : Nuclides()) {
    // Odd mass: half-whole spin; even mass: whole spin.
    const int mass = std::stoi(std::string(nuclide.name));
    EXPECT_EQ(std::lround(2 * nuclide.spin) % 2, mass % 2) << nuclide.name;
    EXPECT_GT(nuclide.abundance, 0);
    EXPECT_LE(nuclide.abundance, 1);
  }
}

// Frequency ratios are measured in compounds, magnetogyric ratios are of the
// free nucleus: they differ by the shielding of the electrons, which in an atom
// of Z electrons is about 3.19e-5 Z^(4/3) (Lamb, Phys. Rev. 1941, 60, 817, with
// the Thomas-Fermi atom; from memory). Bonds and relativity change it, hence a
// margin of one half.
TEST(Nuclides, MagnetogyricAndFrequencyRatiosAgree) {
  const std::map<std::string_view, int> electrons = {
      {"1H", 1},     {"2H", 1},     {"11B", 5},    {"13C", 6},   {"15N", 7},   {"17O", 8},
      {"19F", 9},    {"23Na", 11},  {"27Al", 13},  {"29Si", 14}, {"31P", 15},  {"77Se", 34},
      {"103Rh", 45}, {"113Cd", 48}, {"119Sn", 50}, {"183W", 74}, {"195Pt", 78}};
  const double proton = FindNuclide("1H")->magnetogyric_ratio;
  for (const Nuclide& nuclide : Nuclides()) {
    ASSERT_TRUE(electrons.contains(nuclide.name)) << nuclide.name;
    const double shielding = 3.19e-5 * std::pow(electrons.at(nuclide.name), 4.0 / 3);
    const double of_gamma = 100 * std::abs(nuclide.magnetogyric_ratio) / proton;
    EXPECT_NEAR(nuclide.frequency_ratio / of_gamma, 1, 1.5 * shielding) << nuclide.name;
  }
}

// CODATA 2018: proton 42.577 478 518 MHz/T; deuteron over proton magnetic moment
// 0.307 012 209 4; from memory. gamma = moment / (I hbar): for 2H over 1H half
// the ratio of the moments.
TEST(Nuclides, ProtonAndDeuteronAgreeWithCodata) {
  const Nuclide& proton = *FindNuclide("1H");
  const Nuclide& deuteron = *FindNuclide("2H");
  // The table rests on CODATA 1986, 2.2e-7 below today's value.
  EXPECT_NEAR(proton.magnetogyric_ratio / (2 * std::numbers::pi) / 42.577478518e6, 1, 3e-7);
  EXPECT_NEAR(deuteron.magnetogyric_ratio / proton.magnetogyric_ratio, 0.3070122094 / 2, 2e-8);
}

// The same publication's receptivities relative to the proton, table column
// of its own, three digits; from memory.
TEST(Nuclides, ReceptivitiesAgreeWithTheirOwnColumn) {
  const std::map<std::string_view, double> published = {
      {"1H", 1.0},        {"2H", 1.11e-6},    {"11B", 0.132},     {"13C", 1.70e-4},
      {"15N", 3.84e-6},   {"17O", 1.11e-5},   {"19F", 0.834},     {"23Na", 9.27e-2},
      {"27Al", 0.207},    {"29Si", 3.68e-4},  {"31P", 6.65e-2},   {"77Se", 5.37e-4},
      {"103Rh", 3.17e-5}, {"113Cd", 1.35e-3}, {"119Sn", 4.53e-3}, {"183W", 1.07e-5},
      {"195Pt", 3.51e-3}};
  for (const Nuclide& nuclide : Nuclides()) {
    ASSERT_TRUE(published.contains(nuclide.name)) << nuclide.name;
    EXPECT_NEAR(Receptivity(nuclide) / published.at(nuclide.name), 1, 0.005) << nuclide.name;
  }
}

TEST(Nuclides, FieldOfAFrequency) {
  // 100.6 MHz carbon and 400.1 MHz protons are one magnet of 9.4 T.
  EXPECT_NEAR(FieldTesla(*FindNuclide("13C"), 100.6), 9.395, 0.002);
  EXPECT_NEAR(FieldTesla(*FindNuclide("1H"), 400.1), 9.397, 0.002);
}

// Textbook values of the enhancement 1 + eta: 2.99, -3.93, -1.52, 2.24 (common
// practice, no source).
TEST(Nuclides, LargestOverhauserFactor) {
  EXPECT_NEAR(LargestOverhauserFactor(*FindNuclide("13C")), 2.988, 0.001);
  EXPECT_NEAR(LargestOverhauserFactor(*FindNuclide("15N")), -3.931, 0.001);
  EXPECT_NEAR(LargestOverhauserFactor(*FindNuclide("29Si")), -1.515, 0.001);
  EXPECT_NEAR(LargestOverhauserFactor(*FindNuclide("31P")), 2.234, 0.001);
  EXPECT_EQ(LargestOverhauserFactor(*FindNuclide("1H")), 1);
}

}  // namespace
}  // namespace lastscan::engine
