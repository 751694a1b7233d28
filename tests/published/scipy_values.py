#!/usr/bin/python3
"""Values that the engine's statistics are compared with, computed by SciPy.

Nothing here follows the engine's own way: other quadratures, other coordinates, SciPy's own
distributions and transform. Usage: scipy_values.py FUNCTION ARGUMENT...; the functions are
those of the table at the end. Prints one value a line, to full precision.
"""
import os
import sys

os.environ.setdefault('OPENBLAS_NUM_THREADS', '1')  # before numpy looks

import numpy as np
from scipy import fft, integrate, optimize, special, stats


def chi_square_median(*degrees):
    return [stats.chi2.ppf(0.5, float(k)) for k in degrees]


def deviation_of_median(degrees, count):
    """Relative standard deviation of the root of a median of `count` chi-squares: exact
    density of the middle one of an odd sample, integrated, no large-sample formula."""
    k, m = float(degrees), int(count) // 2
    scale = stats.chi2.ppf(0.5, k)

    def moment(power):
        # The median is chi2.ppf(p) with p from a beta distribution.
        return integrate.quad(
            lambda p: (stats.chi2.ppf(p, k) / scale) ** power * stats.beta.pdf(p, m + 1, m + 1),
            0, 1, points=[0.5], limit=400)[0]
    mean = moment(0.5)
    return [np.sqrt(moment(1) - mean * mean) / mean]


def normal_quantile(*probabilities):
    return [special.ndtri(float(p)) for p in probabilities]


def expected_range(*counts):
    """Tippett's constant from the expected largest value, E(range) = 2 E(max)."""
    return [2 * integrate.quad(
        lambda x, m=float(c): x * m * stats.norm.pdf(x) * stats.norm.cdf(x) ** (m - 1),
        -12, 12, points=[0, 1, 2, 3, 4], limit=400)[0] for c in counts]


def chance_of_reading(threshold, reading, deviation, scans, later):
    """A reading is reading = theta sqrt(scans) + deviation * normal. Integrates the chance over
    the true value, the noise of the first `scans` being shared by both readings."""
    threshold, reading, deviation, scans, later = map(
        float, (threshold, reading, deviation, scans, later))
    ratio = later / scans
    # Scatter beyond that of the noise, from what else is not known.
    extra = np.sqrt(max(deviation * deviation - 1, 0.0))
    nodes, weights = np.polynomial.hermite_e.hermegauss(80)
    chance = 0.0
    for u, wu in zip(nodes, weights):      # the true value about the reading
        for v, wv in zip(nodes, weights):  # what else is not known of it
            truth = reading + u + extra * v
            # After `scans` the motion stands at the reading, less what is not known of it.
            stands = reading + extra * v
            later_mean = (stands + truth * (ratio - 1)) / np.sqrt(ratio)
            chance += wu * wv * stats.norm.sf(threshold, later_mean, np.sqrt(1 - 1 / ratio))
    return [chance / weights.sum() ** 2]


def mixture_boundary(rho, quadratures, level, *scans):
    """Reading, after so many scans, at which the evidence reaches `level`: the likelihood ratio
    against a blank is averaged over normal drifts of variance 1/rho by quadrature, and the root
    found."""
    rho, d, level = float(rho), int(quadratures), float(level)

    def evidence(z, n):
        b = z * np.sqrt(n)
        # One quadrature carries the reading, the other (if any) reads 0.
        def one(b_):
            f = lambda t: np.exp(t * b_ - t * t * n / 2) * stats.norm.pdf(t, 0, rho ** -0.5)
            centre, width = b_ / (n + rho), (n + rho) ** -0.5
            return integrate.quad(f, centre - 12 * width, centre + 12 * width, limit=200)[0]
        return one(b) * (one(0.0) if d == 2 else 1.0)
    return [optimize.brentq(lambda z, n=float(n): np.log(evidence(z, n) / level), 0.01, 15)
            for n in scans]


def unseen_quantiles(quadratures, *arguments):
    """Quantiles of a line that may hide among readings: READINGS... -- PROBABILITIES..."""
    split = arguments.index('--')
    x = np.array([float(a) for a in arguments[:split]])
    q = [float(a) for a in arguments[split + 1:]]
    a = np.linspace(0, 40, 200001)
    density = np.zeros_like(a)
    for z in x:
        if int(quadratures) == 2:
            # Uniform phase: the Bessel function, scaled so that it cannot overflow.
            density += special.ive(0, a * z) * np.exp(a * z - a * a / 2)
        else:
            density += np.exp(a * z - a * a / 2)
    below = integrate.cumulative_trapezoid(density, a, initial=0)
    return list(np.interp(np.array(q) * below[-1], below, a))


def crossing_chance(times, bounds, drift, sides):
    """Chance that drift t + W(t) ever has B(t)/sqrt(t) >= bound at a look (sides 2: or <= -bound).
    Armitage, McPherson and Rowe's recursion on W alone: the drift moves the bounds instead, and
    each integral is done by Gauss-Legendre nodes."""
    crossed, nodes, mass = 0.0, None, None
    previous = 0.0
    for t, bound in zip(times, bounds):
        root = np.sqrt(t)
        high = bound * root - drift * t
        low = -bound * root - drift * t if sides == 2 else -np.inf
        step = np.sqrt(t - previous)
        if nodes is None:
            crossed += stats.norm.sf(high / root) + stats.norm.cdf(low / root)
        else:
            crossed += mass @ (special.ndtr((nodes - high) / step)
                               + special.ndtr((low - nodes) / step))
        a, b = max(low, -9 * root), min(high, 9 * root)
        if a >= b:
            break
        # Enough nodes for the narrowest kernel in sight.
        coming = times[times > t]
        narrow = min(step, np.sqrt(coming[0] - t)) if coming.size else step
        count = int(min(max(40, 3.2 * (b - a) / narrow), 3000))
        x, w = np.polynomial.legendre.leggauss(count)
        x, w = 0.5 * (b - a) * x + 0.5 * (a + b), 0.5 * (b - a) * w
        if nodes is None:
            density = np.exp(-0.5 * (x / root) ** 2) / (root * np.sqrt(2 * np.pi))
        else:
            density = np.exp(-0.5 * ((x[:, None] - nodes[None, :]) / step) ** 2) @ mass
            density /= step * np.sqrt(2 * np.pi)
        nodes, mass, previous = x, w * density, t
    return crossed


def crossing(drift, sides, *looks):
    """Looks are given as TIME:BOUND."""
    pairs = np.array([[float(v) for v in look.split(':')] for look in looks])
    return [crossing_chance(pairs[:, 0], pairs[:, 1], float(drift), int(sides))]


def crossing_even(limit, *looks):
    """Evenly spaced looks at a run that reaches `limit` at the last one, given as LOOKS:MARGIN:
    the chance of ever reading `limit` plus the margin."""
    chances = []
    for look in looks:
        count, margin = int(look.split(':')[0]), float(look.split(':')[1])
        times = np.arange(1, count + 1) / count
        chances.append(crossing_chance(
            times, np.full(count, float(limit) + margin), float(limit), 1))
    return chances


def spectrum(source, target, width, broadening, bins):
    """Reads complex doubles from `source`, weights them with exp(-pi broadening t), halves the
    first, fills up to `bins` and writes the transform, zero frequency in the middle."""
    fid = np.fromfile(source, dtype=np.complex128)
    weighted = fid * np.exp(-np.pi * float(broadening) * np.arange(fid.size) / float(width))
    weighted[0] /= 2
    fft.fftshift(fft.fft(weighted, int(bins))).tofile(target)
    return [fid.size]


def slow_spectrum(source, width, broadening, bins, *which):
    """The same by the plain sum of the definition, bin by bin: no fast transform at all. Prints
    real and imaginary part of the bins named."""
    fid = np.fromfile(source, dtype=np.complex128)
    t = np.arange(fid.size)
    weights = np.exp(-np.pi * float(broadening) * t / float(width))
    weights[0] /= 2
    n = int(bins)
    values = []
    for k in which:
        cycles = (int(k) - n // 2) / n
        value = np.sum(fid * weights * np.exp(-2j * np.pi * cycles * t))
        values += [value.real, value.imag]
    return values


FUNCTIONS = {f.__name__: f for f in (
    chi_square_median, deviation_of_median, normal_quantile, expected_range, chance_of_reading,
    mixture_boundary, unseen_quantiles, crossing, crossing_even, spectrum, slow_spectrum)}

if __name__ == '__main__':
    if len(sys.argv) < 2 or sys.argv[1] not in FUNCTIONS:
        sys.exit(f'scipy_values.py: name one of {", ".join(FUNCTIONS)}')
    for result in FUNCTIONS[sys.argv[1]](*sys.argv[2:]):
        print(f'{result:.17g}')
