// Signal of a pulse repeated faster than the spins relax.
//
// Source: Ernst and Anderson, Rev. Sci. Instrum. 1966, 37, 93; from memory. No
// transverse magnetization is left when the next pulse comes.
#pragma once

namespace lastscan::engine {

// Transverse magnetization right after the pulse, in the steady state, over the
// equilibrium magnetization: sin a (1 - E) / (1 - E cos a), E = exp(-repetition / T1).
// REQUIRES: repetition_time_s > 0, t1_s > 0.
double SteadyStateSignal(double flip_angle_degrees, double repetition_time_s, double t1_s);

// The flip angle, in degrees, with the strongest steady state: arccos E.
// REQUIRES: repetition_time_s > 0, t1_s > 0.
double BestFlipAngleDegrees(double repetition_time_s, double t1_s);

}  // namespace lastscan::engine
