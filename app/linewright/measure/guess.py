"""Where each fit starts: height and width of an extremum by following its flanks."""

from __future__ import annotations

import numpy as np

from .veil import running_mean


def first_guess(trace, index, sign, own, smooth: int):
    """(m, 3) a, c, ln s for features at sample ``index`` with ``sign`` (m,).

    The width is twice the shorter of the two distances to half height; flanks end at
    the next rise. Sources of a veil (own) are seen from the continuum, the others from
    the veil. Never narrower than 0.8 of the line width.
    """
    tame = running_mean(trace.y, smooth + 1 - smooth % 2)
    step = np.gradient(trace.wave)[index]
    fwhm, height = np.empty(len(index)), np.empty(len(index))
    for which, y in ((own, tame), (~own, tame - trace.veil)):
        at, s = index[which], sign[which]
        height[which] = np.maximum(s * y[at], 0.0)
        half = np.stack([_flank(s, y, at, np.maximum(height[which], 1e-9), d) for d in (-1, 1)])
        fwhm[which] = 2.0 * half.min(axis=0) * step[which]
    width = trace.width[index]
    fwhm = np.clip(fwhm, 0.8 * width, 60.0 * width)
    floor = 1.5 * trace.noise[index] / np.sqrt(smooth)
    a = sign * np.maximum(height, floor)
    return np.c_[a, trace.wave[index], np.log(fwhm / 2.3548200450309493)]


def _flank(sign, y, index, height, direction):
    """Samples from each extremum to half its height; stops where the flank turns up."""
    n = len(y)
    distance = np.full(len(index), np.inf)
    lowest, place = height.copy(), np.ones(len(index))
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
        # a flank that turns before half height is a blend's: the valley is its limit
        distance[on[turn]] = 0.8 * place[on[turn]]
        active[on[down | turn]] = False
        deeper = value < lowest[on]
        place[on[deeper]] = k
        lowest[on] = np.minimum(lowest[on], value)
    distance[~np.isfinite(distance)] = 600.0
    return distance
