// Evidence that a line is there, valid however often one looks.
//
// For a bin let B(n) be its reading over the noise per scan. On a blank, B is
// a Brownian motion, and for any rho > 0
//   E(n) = (rho/(n+rho))^(d/2) exp(|B|^2 / (2 (n+rho)))
// is a martingale of mean 1: the normal mixture over drifts of variance 1/rho
// in each of d quadratures (Robbins, Ann. Math. Stat. 1970, 41, 1397; Howard,
// Ramdas, McAuliffe and Sekhon, Ann. Stat. 2021, 49, 1055). So is its mean over
// any fixed set of bins, and by Ville's inequality that mean ever reaches
// 1/alpha with probability at most alpha. With d = 2 it needs no phase.
#pragma once

namespace lastscan::engine {

class MixtureEvidence {
 public:
  // `quadratures`: 2 for magnitudes of complex bins, 1 for real ones.
  // REQUIRES: rho fixed before the run's data are seen.
  MixtureEvidence(double scans, double rho, int quadratures);

  // ln E for a reading of `z` = |B|/sqrt(n), the signal-to-noise of the bin.
  double LogEvidence(double z) const { return log_scale_ + gain_ * z * z; }

  // The reading at which E reaches `level`: the boundary in closed form.
  double ReadingAt(double level) const;

 private:
  double log_scale_;
  double gain_;
};

}  // namespace lastscan::engine
