"""Cosmic rays must not set the flux scale: peaks of a single sample are told from lines."""

from __future__ import annotations

import numpy as np

from .extremes import PixelScale

MOST = 400  # columns looked at; more peaks than that are no accident
# A line sampled at its critical rate has neighbours adding up to its height or more; a hit
# on one detector pixel spills less than half of it.
SPILL = 0.55


def top_without_spikes(parts, reduced, scale: PixelScale, level: tuple[float, float]) -> float:
    """Highest flux in view that is no spike, of what rises above ``level[1]``; -inf for none.

    parts, reduced: Extremes of the segments and what each draws; level: (middle of the
    flux, height from which peaks are looked at)
    """
    middle, threshold = level
    places = [(part, k) for part, drawn in zip(parts, reduced)
              for k in _peaks(part, drawn, scale, threshold)]
    if len(places) > MOST:
        return np.inf
    heights = [float(part.y[k]) for part, k in places if not is_spike(part.y, k, middle)]
    return max(heights, default=-np.inf)


def is_spike(flux: np.ndarray, k: int, middle: float) -> bool:
    """Whether sample k rises from ``middle`` without neighbours that rise with it."""
    around = [flux[i] for i in (k - 1, k + 1) if 0 <= i < len(flux) and np.isfinite(flux[i])]
    spill = sum(max(float(v) - middle, 0.0) for v in around)
    return len(around) == 2 and spill < SPILL * (float(flux[k]) - middle)


def _peaks(part, drawn, scale: PixelScale, threshold: float) -> list[int]:
    """Sample numbers of the local maxima above the threshold, one a column."""
    if drawn.columns is None:
        start, stop = part.visible(scale.low, scale.high)
        flux = np.nan_to_num(part.y[start:stop], nan=-np.inf)
        inner = (flux[1:-1] > threshold) & (flux[1:-1] >= flux[:-2]) & (flux[1:-1] > flux[2:])
        return (start + 1 + np.nonzero(inner)[0]).tolist()
    columns = drawn.columns.column[drawn.columns.high > threshold]
    if len(columns) > MOST:
        return list(range(MOST + 1))
    left = scale.low + (columns - scale.origin) * scale.per_pixel
    first, last = np.searchsorted(part.x, left), np.searchsorted(part.x, left + scale.per_pixel)
    return [a + int(np.nanargmax(part.y[a:b])) for a, b in zip(first.tolist(), last.tolist())
            if b > a and np.isfinite(part.y[a:b]).any()]
