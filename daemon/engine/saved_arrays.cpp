#include "engine/saved_arrays.h"

#include <cstring>
#include <string>

#include "engine/refusal.h"

namespace lastscan::engine {
namespace {

// FNV-1a over 64-bit words (Fowler, Noll and Vo): finds a torn or flipped blob,
// is no defence against forgery.
std::uint64_t Checksum(const std::string& a, const std::string& b) {
  std::uint64_t hash = 0xcbf29ce484222325;
  for (const std::string* bytes : {&a, &b}) {
    std::size_t i = 0;
    for (; i + 8 <= bytes->size(); i += 8) {
      std::uint64_t word;
      std::memcpy(&word, bytes->data() + i, 8);
      hash = (hash ^ word) * 0x100000001b3;
    }
    for (; i < bytes->size(); ++i) {
      hash = (hash ^ static_cast<unsigned char>((*bytes)[i])) * 0x100000001b3;
    }
  }
  return hash;
}

}  // namespace

void SaveArrays(const Scatter& scatter, state::Run& saved) {
  saved.mutable_sum()->assign(reinterpret_cast<const char*>(scatter.sum().data()),
                              scatter.sum().size() * sizeof(std::complex<float>));
  saved.mutable_scatter()->assign(reinterpret_cast<const char*>(scatter.values().data()),
                                  scatter.values().size() * sizeof(float));
  saved.set_scans(scatter.scans());
  saved.set_increments(scatter.increments());
  saved.set_checksum(Checksum(saved.sum(), saved.scatter()));
}

void RestoreArrays(const state::Run& saved, std::size_t bins, Scatter& scatter) {
  if (saved.sum().size() != bins * sizeof(std::complex<float>) ||
      saved.scatter().size() != bins * sizeof(float) ||
      saved.checksum() != Checksum(saved.sum(), saved.scatter())) {
    throw Refusal("the saved state of run '" + saved.latest().run() +
                  "' is damaged: its checksum or size is wrong");
  }
  std::vector<std::complex<float>> sum(bins);
  std::vector<float> values(bins);
  std::memcpy(static_cast<void*>(sum.data()), saved.sum().data(), saved.sum().size());
  std::memcpy(values.data(), saved.scatter().data(), saved.scatter().size());
  scatter.Restore(std::move(sum), std::move(values), saved.scans(), saved.increments());
}

}  // namespace lastscan::engine
