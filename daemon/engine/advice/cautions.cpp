#include "engine/advice/cautions.h"

#include <array>

namespace lastscan::engine {
namespace {

constexpr std::array<std::string_view, 7> kCautions = {
    "The magnetic field is always on: bring no ferromagnetic object inside the marked limit.",
    "Nobody with a pacemaker or another implant may enter the marked limit.",
    "Liquid helium and nitrogen burn skin and displace the air you breathe; only trained staff "
    "fill cryogens or open the magnet area.",
    "A quench can fill a room with cold gas: leave at once, ventilate, call the responsible "
    "person.",
    "Sealed or pressurised sample tubes can burst: shield them and wear eye protection.",
    "Long decoupling heats samples, salty ones most: watch the temperature.",
    "This is advice about scans only. Local rules and the site's responsible person always "
    "decide; it never replaces them.",
};

}  // namespace

std::span<const std::string_view> Cautions() { return kCautions; }

std::string_view CautionInShort() {
  return "Strong magnet, cryogens: local rules and the responsible person decide.";
}

std::string CautionsAsComments(std::string_view prefix) {
  std::string text;
  for (std::string_view caution : kCautions) {
    text.append(prefix).append(caution).push_back('\n');
  }
  return text;
}

}  // namespace lastscan::engine
