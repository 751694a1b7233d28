#include "engine/saved_arrays.h"

#include <cstdint>
#include <cstring>

#include "engine/refusal.h"

namespace lastscan::engine {
namespace {

// FNV-1a over 64-bit words (Fowler, Noll and Vo): finds a torn or flipped blob,
// is no defence against forgery.
std::uint64_t Checksum(std::string_view bytes) {
  std::uint64_t hash = 0xcbf29ce484222325;
  std::size_t i = 0;
  for (; i + 8 <= bytes.size(); i += 8) {
    std::uint64_t word;
    std::memcpy(&word, bytes.data() + i, 8);
    hash = (hash ^ word) * 0x100000001b3;
  }
  for (; i < bytes.size(); ++i) {
    hash = (hash ^ static_cast<unsigned char>(bytes[i])) * 0x100000001b3;
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
}

void RestoreArrays(const state::Run& saved, std::size_t bins, Scatter& scatter) {
  if (saved.sum().size() != bins * sizeof(std::complex<float>) ||
      saved.scatter().size() != bins * sizeof(float)) {
    throw Refusal("the saved state of run '" + saved.latest().run() +
                  "' holds another number of bins than its snapshots have: send them again under "
                  "a new run name");
  }
  std::vector<std::complex<float>> sum(bins);
  std::vector<float> values(bins);
  std::memcpy(static_cast<void*>(sum.data()), saved.sum().data(), saved.sum().size());
  std::memcpy(values.data(), saved.scatter().data(), saved.scatter().size());
  scatter.Restore(std::move(sum), std::move(values), saved.scans(), saved.increments());
}

std::string Sealed(std::string message) {
  const std::uint64_t checksum = Checksum(message);
  return message.append(reinterpret_cast<const char*>(&checksum), sizeof checksum);
}

std::string_view Unsealed(std::string_view sealed) {
  std::uint64_t checksum = 0;
  if (sealed.size() >= sizeof checksum) {
    const std::string_view message = sealed.substr(0, sealed.size() - sizeof checksum);
    std::memcpy(&checksum, sealed.data() + message.size(), sizeof checksum);
    if (checksum == Checksum(message)) return message;
  }
  throw Refusal(
      "the saved run is damaged, its checksum is wrong: send its snapshots again under a new run "
      "name");
}

}  // namespace lastscan::engine
