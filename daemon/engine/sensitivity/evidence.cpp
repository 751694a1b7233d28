#include "engine/sensitivity/evidence.h"

#include <algorithm>
#include <cmath>

namespace lastscan::engine {

MixtureEvidence::MixtureEvidence(double scans, double rho, int quadratures)
    : log_scale_(0.5 * quadratures * std::log(rho / (scans + rho))),
      gain_(0.5 * scans / (scans + rho)) {}

double MixtureEvidence::ReadingAt(double level) const {
  return std::sqrt(std::max(0.0, (std::log(level) - log_scale_) / gain_));
}

}  // namespace lastscan::engine
