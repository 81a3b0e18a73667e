"""Features narrower than the spectrum's lines, and blends closer than a line width.

The main filters have the width of the star's lines. In a rotating star interstellar and
telluric lines are much narrower, and two equal lines nearer than a width make one maximum
of the smoothed curvature. A curvature filter of half the width tells them apart. What it
adds must still pass the main filter's threshold, and its fit must find it significant.
"""

from __future__ import annotations

import numpy as np

from .detect import distinct, same, supported
from .matched import curvature_kernel, noise_gain

SHARE = 0.5  # of the line width
LEAST = 2.5  # samples: a narrower filter sees single samples
APART = 0.6  # line widths from features already found


def narrow_extrema(trace, run, filtered, threshold: float, taken):
    """(sample index, sign, significance) of features the main filters joined, each (m,).

    trace: Trace; run: slice of the stretch;
    filtered: Filtered of it; taken: (index, sign) found in it, counted from its start.
    """
    width = SHARE * float(np.median(filtered.fwhm))
    if width < LEAST:
        return np.zeros((0, 3))
    y, good, noise = trace.y[run], trace.good[run], trace.noise[run]
    kernel = curvature_kernel(width)
    held = np.where(good, y, np.interp(np.arange(len(y)), np.flatnonzero(good), y[good]))
    curve = same(held, kernel) / (noise * noise_gain(kernel, trace.correlation))
    found = []
    for sign in (1, -1):
        there = np.sort(taken[0][taken[1] == sign])
        bends = distinct(sign * curve, threshold, threshold)
        bends = bends[sign * filtered.level[bends] >= threshold]
        bends = bends[_away(bends, there, APART * filtered.fwhm)]
        found.append(np.c_[bends, np.full(len(bends), sign), sign * filtered.level[bends]])
    table = np.concatenate(found)
    return table[supported(table[:, 0].astype(int), good, SHARE * filtered.fwhm)]


def _away(places, there, least):
    """True for samples at least ``least`` (n,) from all of ``there`` (sorted)."""
    if not len(there) or not len(places):
        return np.ones(len(places), dtype=bool)
    right = np.clip(np.searchsorted(there, places), 0, len(there) - 1)
    left = np.maximum(right - 1, 0)
    near = np.minimum(np.abs(there[right] - places), np.abs(there[left] - places))
    return near >= least[places]
