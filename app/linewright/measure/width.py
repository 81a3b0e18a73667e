"""Width of the narrowest lines: the instrument's profile or the star's own lines."""

from __future__ import annotations

import numpy as np


def extrema_widths(wave, y, noise, smooth: int):
    """FWHM of distinct strong extrema: (wave, FWHM in Angstrom, FWHM in samples).

    y: (continuum - flux)/continuum, shape (n,) without gaps; noise: one sigma of y, (n,);
    smooth: samples of the running mean that tames the noise (1: none). Each side is
    followed down from the extremum to half of its height above the zero level; a side
    that turns up before (a blend) does not count, the other is doubled.
    """
    kernel = np.ones(smooth) / smooth
    run = np.convolve(y, kernel, mode="same") if smooth > 1 else y
    found = []
    for sign in (1.0, -1.0):
        z = sign * run
        top = np.flatnonzero((z[1:-1] > z[:-2]) & (z[1:-1] >= z[2:])) + 1
        top = top[z[top] > np.maximum(20.0 * noise[top] / np.sqrt(smooth), 0.03)]
        for i in top:
            sides = [_half_way(z, i, step) for step in (-1, 1)]
            ends = [s for s in sides if s is not None]
            if len(ends) == 2 and max(ends) < 2.0 * min(ends):
                pixels = max(sum(ends) ** 2 - (smooth**2 - 1) * 0.46, 1.0) ** 0.5
                step = (wave[min(i + 1, len(wave) - 1)] - wave[i - 1]) / 2.0
                found.append((wave[i], pixels * step, pixels))
    return np.array(found).reshape(-1, 3)


def _half_way(z, i, step):
    """Samples from extremum i to half its height going ``step``; None when it turns up."""
    half, last, k = 0.5 * z[i], z[i], i + step
    rise = 0.05 * z[i]
    lowest = z[i]
    while 0 <= k < len(z) and abs(k - i) < 400:
        if z[k] <= half:
            return abs(k - i) - (half - z[k]) / (last - z[k])
        lowest = min(lowest, z[k])
        if z[k] > lowest + rise:
            return None
        last = z[k]
        k += step
    return None


def narrow_width(found: np.ndarray, column: int = 1, quantile: float = 0.25) -> float:
    """The lower quartile of log widths: typical of unblended, unsaturated lines; or NaN."""
    if len(found) < 3:
        return float(np.min(found[:, column])) if len(found) else float("nan")
    return float(np.exp(np.quantile(np.log(found[:, column]), quantile)))


def width_nodes(found: np.ndarray, low: float, high: float) -> tuple[np.ndarray, np.ndarray]:
    """Nodes (wave, FWHM in Angstrom) between ``low`` and ``high``.

    Constant resolving power or constant FWHM, whichever the lines' widths follow better
    (least scatter of the lower half), with one typical value: few lines carry no more.
    """
    ends = np.array([low, high])
    if len(found) < 3:
        value = narrow_width(found)
        return ends, np.array([value, value])
    flat = narrow_width(found)
    slope = narrow_width(np.c_[found[:, 0], found[:, 1] / found[:, 0]])
    if len(found) < 30:
        return ends, slope * ends
    def spread(scaled):
        log = np.sort(np.log(scaled))[: max(3, len(scaled) // 2)]
        return log[-1] - log[len(log) // 4]
    if spread(found[:, 1]) < 0.97 * spread(found[:, 1] / found[:, 0]):
        return ends, np.array([flat, flat])
    return ends, slope * ends
