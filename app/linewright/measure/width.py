"""Width of the narrowest lines: the instrument's profile or the star's own lines.

A spectrum made of Gaussian lines of one width, wherever they stand and however they
overlap, has the autocorrelation A(t) = exp(-t^2 / (4 s^2)). First and second differences
at a lag, D1 = 2 (A_0 - A_1) and D2 = 6 A_0 - 8 A_1 + 2 A_2, weigh narrow structure most and
see neither level nor broad wings; their ratio gives s. The noise's own share is known and
taken off. Each block of the spectrum gives one value, and ``width_law`` follows them.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from .width_law import WidthLaw, bent_law, constant_law, law_error

FWHM_PER_SIGMA = 2.3548200450309493
LAGS = (1, 2, 3, 4, 6, 9, 13, 20, 30, 45, 70, 100)
COARSE = 8  # samples
RESOLVED = 3.5  # means per FWHM that a line must span to be measured on means
ZONES = 24
BLUNT = 0.7  # sigma in lags below which a block's ratio says little
LEAST_SIGNAL = 3.0  # structure over noise, in variance of differences, for a block to count


def difference_ratio(sigma):
    """D2/D1 of Gaussian lines of ``sigma`` lags."""
    a1, a2 = np.exp(-0.25 / sigma**2), np.exp(-1.0 / sigma**2)
    return (6.0 - 8.0 * a1 + 2.0 * a2) / (2.0 * (1.0 - a1))


def block_size(lag: int) -> int:
    """Samples of a block."""
    return max(64, 40 * lag)


def block_widths(y, noise, good, run, correlation, lag: int) -> np.ndarray:
    """(middle sample, FWHM in samples) of the blocks with enough structure, shape (b, 2).

    y: (continuum - flux)/continuum; noise: its one sigma; good: usable; run: slice
    without gaps; correlation: of the noise; lag: samples between the differences.
    """
    r = np.zeros(2 * lag + 1)
    known = correlation[: 2 * lag + 1]
    r[: len(known)] = known
    n1, n2 = 2.0 * (1.0 - r[lag]), 6.0 - 8.0 * r[lag] + 2.0 * r[2 * lag]
    size = min(block_size(lag), run.stop - run.start)
    count = (run.stop - run.start) // size
    if size < max(16, 6 * lag):
        return np.zeros((0, 2))
    cut = slice(run.start, run.start + count * size)
    z, ok = y[cut].reshape(count, size), good[cut].reshape(count, size)
    var = np.mean(noise[cut].reshape(count, size) ** 2, axis=1)
    one = z[:, lag:] - z[:, :-lag]
    both = ok[:, lag:] & ok[:, :-lag]
    two = one[:, lag:] - one[:, :-lag]
    all3 = both[:, lag:] & both[:, :-lag]
    d1 = _mean_square(one, both) - n1 * var
    d2 = _mean_square(two, all3) - n2 * var
    fine = (ok.mean(axis=1) >= 0.8) & (d2 >= LEAST_SIGNAL * n2 * var) & (d1 > 0)
    grid = np.geomspace(0.35, 60.0, 400)
    with np.errstate(divide="ignore", invalid="ignore"):
        sigma = np.interp(-d2 / d1, -difference_ratio(grid), grid)
    middle = run.start + (np.arange(count) + 0.5) * size - 0.5
    return np.c_[middle, lag * sigma * FWHM_PER_SIGMA][fine]


def pooled_width(y, noise, good, runs, correlation, lags=LAGS):
    """(FWHM in samples, lag) from all samples at once, at the shortest of ``lags`` that shows
    lines; None where none does."""
    grid = np.geomspace(0.35, 60.0, 400)
    for lag in (k for k in lags if k >= len(correlation)):
        r = np.r_[correlation, np.zeros(2 * lag + 1)]
        sums = np.zeros(4)
        for run in runs:
            z, ok, var = y[run], good[run], noise[run] ** 2
            one, both = z[lag:] - z[:-lag], ok[lag:] & ok[:-lag]
            two, all3 = one[lag:] - one[:-lag], both[lag:] & both[:-lag]
            sums += (np.sum(one[both] ** 2 - 2 * (1 - r[lag]) * var[lag:][both]),
                     np.sum(two[all3] ** 2 - (6 - 8 * r[lag] + 2 * r[2 * lag]) *
                            var[lag : len(z) - lag][all3]),
                     np.sum(6.0 * var[lag : len(z) - lag][all3]), all3.sum())
        doubt = sums[2] * (0.02 + 3.0 / np.sqrt(max(sums[3], 1.0)))
        if sums[0] > 0 and sums[1] > 3.0 * doubt:
            sigma = np.interp(-sums[1] / sums[0], -difference_ratio(grid), grid)
            return float(lag * sigma * FWHM_PER_SIGMA), lag
    return None


def zone_widths(y, noise, good, runs, correlation, lag: int) -> np.ndarray:
    """(middle sample, FWHM in samples) of up to ZONES equal parts of the segment, all their
    samples pooled at ``lag``, shape (z, 2)."""
    edges = np.linspace(runs[0].start, runs[-1].stop, ZONES + 1).astype(int)
    found = []
    for a, b in zip(edges[:-1], edges[1:]):
        parts = [slice(max(a, r.start), min(b, r.stop)) for r in runs]
        parts = [p for p in parts if p.stop - p.start > max(16, 6 * lag)]
        value = pooled_width(y, noise, good, parts, correlation, (lag,)) if parts else None
        if value is not None:
            found.append((0.5 * (a + b - 1), value[0]))
    return np.array(found).reshape(-1, 2)


def _mean_square(values, ok):
    return np.sum(np.where(ok, values * values, 0.0), axis=1) / np.maximum(ok.sum(axis=1), 1)


def measure_width(wave, y, noise, good, runs, correlation) -> WidthLaw | None:
    """How the FWHM of the narrowest lines runs along the segment, or None.

    None when fewer than three blocks hold lines, nor do means of COARSE samples: the lines
    of a fast rotator are shallow, and only many samples together show them.
    """
    law = _law(wave, y, noise, good, runs, correlation)
    count = len(wave) // COARSE
    if law is not None or len(runs) > 1 or count < 400:
        return law
    cut = slice(0, count * COARSE)

    def means(values):
        return values[cut].reshape(count, COARSE).mean(axis=1)

    length = min(1.0 + 2.0 * float(np.sum(correlation[1:])), COARSE)
    rough = _law(means(wave), means(y), means(noise) * np.sqrt(length / COARSE),
                 means(good) > 0.7, [slice(0, count)], np.array([1.0]))
    if rough is None or np.median(sampled(rough, means(wave)) / np.gradient(means(wave))) < RESOLVED:
        return None  # sharp lines, smeared by the means
    return rough


def sampled(law: WidthLaw, wave) -> np.ndarray:
    """FWHM in Angstrom at every sample, no less than two samples, (n,)."""
    return np.maximum(law.at(wave), 2.0 * np.gradient(wave))


def _law(wave, y, noise, good, runs, correlation) -> WidthLaw | None:
    step = np.gradient(wave)
    tables = []
    lags = [lag for lag in LAGS if lag >= len(correlation)]  # nearer samples share noise
    for lag in lags:
        parts = [block_widths(y, noise, good, r, correlation, lag) for r in runs]
        tables.append(np.concatenate(parts))
    share = np.array([len(t) * block_size(lag) for t, lag in zip(tables, lags, strict=True)])
    if share.max() == 0 or max(len(t) for t in tables) < 3:
        return None
    # the shortest lag at which most of the blocks rise above the noise
    chosen = int(np.argmax((share >= 0.5 * share.max()) & (share > 0)))
    found = tables[chosen]
    even = _even_log(wave, step)
    span = float(wave[runs[0].start]), float(wave[runs[-1].stop - 1])
    if np.median(found[:, 1]) < BLUNT * lags[chosen] * FWHM_PER_SIGMA:
        # lines narrower than the lag: single blocks are too noisy, all together are not
        pooled = pooled_width(y, noise, good, runs, correlation)
        if pooled is not None:
            tried = [k for k in lags if pooled[1] <= k <= 3 * pooled[1]]
            zones = [zone_widths(y, noise, good, runs, correlation, k) for k in tried]
            # a lag too short shows only the narrow end of the segment
            found = next((z for z in zones if len(z) > 0.9 * ZONES), zones[-1])
            whole = constant_law(*_placed(wave, step, [[len(wave) / 2, pooled[0]]]), span, even)
            placed = _placed(wave, step, found)
            return bent_law(replace(whole, error=law_error(*placed)), *placed, span)
    placed = _placed(wave, step, found)
    return bent_law(constant_law(*placed, span, even), *placed, span)


def _placed(wave, step, found):
    """Wavelengths and FWHM in Angstrom of (sample, FWHM in samples), each (b,)."""
    found = np.asarray(found, dtype=float).reshape(-1, 2)
    at = np.rint(found[:, 0]).astype(int)
    return wave[at], found[:, 1] * step[at]


def _even_log(wave, step) -> bool:
    """Samples even in ln(wavelength) tell of an instrument of constant resolving power."""
    return bool(np.ptp(step / wave) / np.mean(step / wave) < np.ptp(step) / np.mean(step))
