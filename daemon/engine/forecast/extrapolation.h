// The root-of-scans law, forwards: what will be read after more scans, and how
// many scans a target needs.
//
// With theta = a/sqrt(n) the true signal-to-noise of one scan, B(n) = theta n +
// W(n). Given a reading a +- s now and a flat prior, the reading after N scans
// is normal about a sqrt(N/n) with variance N/n - 1 + (N/n)(s^2 - 1): the noise
// still to come, what is not known of theta, less what both share.
#pragma once

#include "engine/sensitivity/posterior.h"

namespace lastscan::engine {

struct Spread {
  double centre = 0;
  double deviation = 0;
};

// REQUIRES: scans, later > 0. For later <= scans: the reading as it stands.
Spread ReadingLater(double reading, double deviation, double scans, double later);

// Scans at which the true signal-to-noise reaches `target`, when it is `truth`
// after `scans`: infinite for a truth of 0.
double ScansForTarget(double target, double truth, double scans);

// Chance that a reading after `later` scans is at least `threshold`, for a line
// that reads `reading` now...
double ChanceOfReading(double threshold, double reading, double deviation, double scans,
                       double later);

// ...and for a line not seen yet, of which the posterior is known.
double ChanceOfReading(double threshold, const AmplitudePosterior& unseen, double scans,
                       double later);

}  // namespace lastscan::engine
