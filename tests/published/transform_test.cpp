// The engine's transform against SciPy's, point by point, and against the plain
// sum that defines it.
#include "engine/spectrum/transform.h"

#include <gtest/gtest.h>

#include <algorithm>
#include <cmath>
#include <complex>
#include <filesystem>
#include <fstream>
#include <numbers>
#include <random>
#include <string>
#include <vector>

#include "published/script.h"

namespace lastscan::engine {
namespace {

using Complex = std::complex<double>;
using published::Argument;
using published::SciPy;

// Two damped lines and noise.
std::vector<Complex> InventedFid(std::size_t points, double width) {
  std::mt19937_64 random(11);
  std::normal_distribution<double> normal(0, 0.3);
  std::vector<Complex> fid(points);
  for (std::size_t t = 0; t < points; ++t) {
    const double seconds = static_cast<double>(t) / width;
    const double real = normal(random);
    fid[t] = Complex(real, normal(random)) +
             5.0 * std::exp(Complex(-9, 2 * std::numbers::pi * 1000.3) * seconds) +
             2.0 * std::exp(Complex(-5, -2 * std::numbers::pi * 2345.6) * seconds);
  }
  return fid;
}

class TransformAgainstSciPy : public ::testing::TestWithParam<std::uint32_t> {
 protected:
  void SetUp() override {
    const auto* test = ::testing::UnitTest::GetInstance()->current_test_info();
    std::string name = std::string("lastscan-") + test->name() + ".bin";
    std::replace(name.begin(), name.end(), '/', '-');
    source_ = std::filesystem::temp_directory_path() / name;
    target_ = source_.string() + ".out";
  }
  void TearDown() override {
    std::filesystem::remove(source_);
    std::filesystem::remove(target_);
  }
  std::filesystem::path source_;
  std::filesystem::path target_;
};

TEST_P(TransformAgainstSciPy, PointByPoint) {
  constexpr double kWidth = 8000;
  constexpr double kBroadening = 1.7;
  v1::Snapshot snapshot;
  snapshot.set_domain(v1::FID);
  snapshot.set_points(GetParam());
  snapshot.set_spectral_width_hz(kWidth);
  snapshot.set_observe_frequency_mhz(100);
  snapshot.set_centre_shift_ppm(70);
  const Transform transform(snapshot, kBroadening);
  const auto bins = static_cast<std::size_t>(transform.axis().bins);
  ASSERT_GE(bins, 2u * GetParam());

  const std::vector<Complex> fid = InventedFid(GetParam(), kWidth);
  std::ofstream(source_, std::ios::binary)
      .write(reinterpret_cast<const char*>(fid.data()),
             static_cast<std::streamsize>(fid.size() * sizeof(Complex)));
  const std::vector<double> read =
      SciPy("spectrum", std::vector<std::string>{source_, target_, Argument(kWidth),
                                                 Argument(kBroadening), std::to_string(bins)});
  ASSERT_EQ(read.at(0), GetParam());
  std::vector<Complex> expected(bins);
  std::ifstream file(target_, std::ios::binary);
  file.read(reinterpret_cast<char*>(expected.data()),
            static_cast<std::streamsize>(bins * sizeof(Complex)));
  ASSERT_EQ(static_cast<std::size_t>(file.gcount()), bins * sizeof(Complex));

  const std::vector<Complex> spectrum = transform.Apply(fid);
  ASSERT_EQ(spectrum.size(), bins);
  const auto louder = [](const Complex& a, const Complex& b) { return std::abs(a) < std::abs(b); };
  const auto top = std::max_element(spectrum.begin(), spectrum.end(), louder);
  for (std::size_t j = 0; j < bins; ++j) {
    ASSERT_LT(std::abs(spectrum[j] - expected[j]), 1e-12 * std::abs(*top)) << "bin " << j;
  }
  // And no agreement of two fast transforms in the same error.
  const std::ptrdiff_t of_top = top - spectrum.begin();
  const std::vector<std::ptrdiff_t> some = {0, 17, of_top, transform.axis().bins - 1};
  std::vector<std::string> arguments = {source_, Argument(kWidth), Argument(kBroadening),
                                        std::to_string(bins)};
  for (std::ptrdiff_t bin : some) arguments.push_back(std::to_string(bin));
  const std::vector<double> slow = SciPy("slow_spectrum", arguments);
  ASSERT_EQ(slow.size(), 2 * some.size());
  for (std::size_t i = 0; i < some.size(); ++i) {
    const Complex value = spectrum[static_cast<std::size_t>(some[i])];
    EXPECT_LT(std::abs(value - Complex(slow[2 * i], slow[2 * i + 1])), 1e-10 * std::abs(*top));
  }
  // A line 1,000.3 Hz above the centre lies 10.003 ppm above 70 ppm.
  EXPECT_NEAR(transform.axis().PpmAt(static_cast<double>(of_top)), 80.003,
              transform.axis().ppm_per_bin());
}

INSTANTIATE_TEST_SUITE_P(Points, TransformAgainstSciPy, ::testing::Values(1000, 4096, 10007));

}  // namespace
}  // namespace lastscan::engine
