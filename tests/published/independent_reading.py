#!/usr/bin/python3
"""Signal-to-noise of the strongest line of a file, computed by SciPy along other ways than the
engine's: height over the rms noise of the finished data.

Usage: independent_reading.py FILE BROADENING_HZ [LOW:HIGH...]; ranges in ppm are left out.
Prints the ratio, the shift (ppm), the height and the noise, one a line.

FID: weighted with exp(-pi broadening t), filled with zeros to eight times its length, highest
magnitude. Its noise is that of the points, by Thomson's multitaper estimate (Proc. IEEE 1982, 70,
1055, from memory): the tapers leave a line no feet beyond their bandwidth, so the bins between
the lines hold noise alone. The broadened spectrum has sqrt(sum of squared weights) times it.

Spectrum: highest point as it stands; its noise is the deviation about a running base line in the
stretches without lines, as a robust deviation (1.4826 times the median of absolute values).
"""
import os
import re
import sys

os.environ.setdefault('OPENBLAS_NUM_THREADS', '1')  # before numpy looks

import numpy as np
from scipy import fft, ndimage, signal, stats

import read_jcamp


def without_lines(values, level, limit, reach, wrap):
    """Marks the values that neither exceed limit * level(kept values) nor lie within `reach` of
    one that does; repeats until nothing changes."""
    kept = np.ones(values.size, bool)
    for _ in range(100):
        loud = values > limit * level(values[kept])
        quiet = ~ndimage.maximum_filter1d(loud, 2 * reach + 1, mode='wrap' if wrap else 'nearest')
        if (quiet == kept).all():
            return kept
        kept = quiet
    raise SystemExit('the quiet part does not settle')


def noise_of_fid(fid, bandwidth=12, tapers=14):
    """rms per quadrature and point."""
    windows = signal.windows.dpss(fid.size, bandwidth, tapers)  # each of unit energy
    powers = np.mean([np.abs(fft.fft(fid * window)) ** 2 for window in windows], axis=0)
    # A bin of noise is chi-square with 2 * tapers degrees of freedom: gamma of shape `tapers`.
    median = stats.gamma.median(tapers) / tapers
    limit = stats.gamma.isf(1e-5, tapers) / tapers
    kept = without_lines(powers, lambda p: np.median(p) / median, limit, 2 * bandwidth, True)
    return np.sqrt(powers[kept].mean() / 2)


def noise_of_spectrum(spectrum):
    """rms of a point."""
    residual = np.abs(spectrum - ndimage.median_filter(spectrum, 1501))

    def deviation(r):
        return 1.4826 * np.median(r)
    return deviation(residual[without_lines(residual, deviation, 4.5, 60, False)])


def top(values, at):
    """Height and place of the parabola through three points."""
    left, middle, right = values[at - 1], values[at], values[(at + 1) % values.size]
    curvature = left - 2 * middle + right
    return middle - (left - right) ** 2 / (8 * curvature), at + (left - right) / (2 * curvature)


def main(path, broadening, *left_out):
    kind, points, width, centre, samples = read_jcamp.read(path)
    with open(path, encoding='latin-1') as file:
        stated = dict(re.findall(r'^##([^=\n]*)=\s*([-+.\dEe]+)', file.read(), re.M))
    frequency = float(stated['.OBSERVE FREQUENCY'])
    if kind == 'NMR FID':
        fid = samples[0::2] + 1j * samples[1::2]
        weights = np.exp(-np.pi * float(broadening) * np.arange(points) / width)
        weights[0] /= 2
        curve = np.abs(fft.fftshift(fft.fft(fid * weights, 8 * points)))
        noise = noise_of_fid(fid) * np.sqrt(np.sum(weights ** 2))
        step, offset = width / frequency / curve.size, curve.size / 2
    else:
        curve, noise = samples, noise_of_spectrum(samples)
        if float(stated['FIRSTX']) > float(stated['LASTX']):
            curve = curve[::-1]
        step, offset = width / frequency / points, (points - 1) / 2
    shifts = centre + (np.arange(curve.size) - offset) * step
    sought = curve.copy()
    for span in left_out:
        low, high = (float(end) for end in span.split(':'))
        sought[(shifts >= low) & (shifts <= high)] = 0
    height, place = top(curve, int(np.argmax(sought)))
    for value in (height / noise, centre + (place - offset) * step, height, noise):
        print(repr(float(value)))


if __name__ == '__main__':
    main(*sys.argv[1:])
