"""Where each fit starts: height and width of an extremum by following its flanks."""

from __future__ import annotations

import numpy as np


def first_guess(trace, index, sign, smooth: int):
    """(m, 3) a, c, ln s for features at sample ``index`` with ``sign`` (m,).

    The width is twice the shorter of the two distances to half height; flanks end at
    the next feature's mid-way point. Never narrower than 0.8 of the line width.
    """
    kernel = np.ones(smooth) / smooth
    y = np.convolve(trace.y, kernel, mode="same") if smooth > 1 else trace.y
    height = np.abs(y[index])
    step = np.gradient(trace.wave)[index]
    half = np.stack([_flank(sign, y, index, height, d) for d in (-1, 1)])
    fwhm = 2.0 * half.min(axis=0) * step
    width = trace.width[index]
    fwhm = np.clip(fwhm, 0.8 * width, 60.0 * width)
    floor = 1.5 * trace.noise[index] / np.sqrt(smooth)
    a = sign * np.maximum(np.where(sign * y[index] > 0, height, 0.0), floor)
    return np.c_[a, trace.wave[index], np.log(fwhm / 2.3548200450309493)]


def _flank(sign, y, index, height, direction):
    """Samples from each extremum to half its height; stops where the flank turns up."""
    n = len(y)
    distance = np.full(len(index), np.inf)
    lowest = height.copy()
    active = np.ones(len(index), dtype=bool)
    for k in range(1, 600):
        on = np.flatnonzero(active)
        if not len(on):
            break
        at = index[on] + direction * k
        value = sign[on] * y[np.clip(at, 0, n - 1)]
        out = (at < 0) | (at >= n)
        down = (value <= 0.5 * height[on]) | out
        turn = ~down & (value > lowest[on] + 0.1 * height[on])
        before = np.maximum(lowest[on] - value, 1e-12)
        part = np.clip((lowest[on] - 0.5 * height[on]) / before, 0.0, 1.0)
        distance[on[down]] = (k - 1 + part)[down]
        # a flank that turned has fallen to ``lowest`` after about k samples
        fall = np.clip(1.0 - lowest[on] / height[on], 0.02, 0.5)
        distance[on[turn]] = (k * np.sqrt(0.5 / fall))[turn]
        active[on[down | turn]] = False
        lowest[on] = np.minimum(lowest[on], value)
    distance[~np.isfinite(distance)] = 600.0
    return distance
