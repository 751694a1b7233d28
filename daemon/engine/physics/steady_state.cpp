#include "engine/physics/steady_state.h"

#include <cmath>
#include <numbers>

namespace lastscan::engine {

double SteadyStateSignal(double flip_angle_degrees, double repetition_time_s, double t1_s) {
  const double flip = flip_angle_degrees * std::numbers::pi / 180;
  const double recovered = -std::expm1(-repetition_time_s / t1_s);  // 1 - E
  // 1 - E cos a = (1 - E) + E (1 - cos a), without the loss of digits.
  const double half = std::sin(flip / 2);
  return std::sin(flip) * recovered / (recovered + (1 - recovered) * 2 * half * half);
}

double BestFlipAngleDegrees(double repetition_time_s, double t1_s) {
  // arccos E = 2 arcsin sqrt((1 - E) / 2), again for repetition fast against T1.
  const double recovered = -std::expm1(-repetition_time_s / t1_s);
  return 2 * std::asin(std::sqrt(recovered / 2)) * 180 / std::numbers::pi;
}

}  // namespace lastscan::engine
