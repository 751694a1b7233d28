#include "engine/spectrum/samples.h"

#include <Eigen/Core>
#include <algorithm>
#include <bit>
#include <cmath>
#include <cstdint>
#include <cstring>

#include "engine/refusal.h"

namespace lastscan::engine {
namespace {

static_assert(std::endian::native == std::endian::little,
              "frames are little-endian and mapped in place");

// An unaligned Eigen view of the frame: samples stay where they arrived. The
// frame may start at any byte, so alignment is not promised to Eigen; x86-64
// and AArch64 both load unaligned scalars, and memcpy covers the rest.
template <typename Scalar>
void Widen(std::string_view samples, Eigen::Map<Eigen::ArrayXd> out) {
  if (reinterpret_cast<std::uintptr_t>(samples.data()) % alignof(Scalar) == 0) {
    out = Eigen::Map<const Eigen::Array<Scalar, Eigen::Dynamic, 1>>(
              reinterpret_cast<const Scalar*>(samples.data()), out.size())
              .template cast<double>();
    return;
  }
  for (Eigen::Index i = 0; i < out.size(); ++i) {
    Scalar value;
    std::memcpy(&value, samples.data() + i * sizeof(Scalar), sizeof(Scalar));
    out[i] = static_cast<double>(value);
  }
}

void Decode(v1::Encoding encoding, std::string_view samples, Eigen::Map<Eigen::ArrayXd> out) {
  switch (encoding) {
    case v1::FLOAT32:
      return Widen<float>(samples, out);
    case v1::FLOAT64:
      return Widen<double>(samples, out);
    default:
      return Widen<std::int32_t>(samples, out);
  }
}

}  // namespace

std::size_t FrameBytes(const v1::Snapshot& snapshot) {
  std::size_t bytes = 0;
  switch (snapshot.encoding()) {
    case v1::FLOAT32:
    case v1::INT32:
      bytes = 4;
      break;
    case v1::FLOAT64:
      bytes = 8;
      break;
    default:
      return 0;
  }
  switch (snapshot.domain()) {
    case v1::FID:
      return 2 * bytes * snapshot.points();
    case v1::SPECTRUM:
      return bytes * snapshot.points();
    default:
      return 0;
  }
}

std::vector<std::complex<double>> SummedSamples(const v1::Snapshot& snapshot,
                                                std::string_view samples) {
  const auto points = static_cast<Eigen::Index>(snapshot.points());
  const bool fid = snapshot.domain() == v1::FID;
  std::vector<std::complex<double>> sum(snapshot.points());
  // std::complex<double> is laid out as two doubles; a spectrum is decoded into
  // the front half and spread out afterwards, from the back.
  Eigen::Map<Eigen::ArrayXd> values(reinterpret_cast<double*>(sum.data()),
                                    fid ? 2 * points : points);
  Decode(snapshot.encoding(), samples, values);
  if (!values.isFinite().all()) {
    const double* first = std::find_if_not(values.data(), values.data() + values.size(),
                                           [](double value) { return std::isfinite(value); });
    const auto index = (first - values.data()) / (fid ? 2 : 1);
    throw Refusal("point " + std::to_string(index) + " of run '" + snapshot.run() +
                  "' is not a finite number: export the snapshot again");
  }
  if (snapshot.accumulation() == v1::MEAN) values *= static_cast<double>(snapshot.scans_done());
  if (fid) {
    if (snapshot.reversed()) {
      for (auto& point : sum) point = std::conj(point);
    }
    return sum;
  }
  for (Eigen::Index i = points - 1; i >= 0; --i) sum[i] = values[i];
  if (!snapshot.reversed()) std::reverse(sum.begin(), sum.end());
  return sum;
}

}  // namespace lastscan::engine
