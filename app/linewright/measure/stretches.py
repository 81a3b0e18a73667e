"""Usable samples of a segment, cut into stretches at gaps."""

from __future__ import annotations

import numpy as np

FLAT_RUN = 8  # equal neighbours in a row that no detector gives: filled gaps


def flat_runs(flux: np.ndarray, least: int = FLAT_RUN) -> np.ndarray:
    """True where ``least`` or more neighbouring samples hold one identical value.

    Real samples carry noise; filled gaps and clipped ends do not.
    """
    n = len(flux)
    flat = np.zeros(n, dtype=bool)
    if n < least:
        return flat
    edges = np.flatnonzero(np.r_[True, flux[1:] != flux[:-1], True])
    long = np.flatnonzero(np.diff(edges) >= least)
    for start, stop in zip(edges[long], edges[long + 1]):
        flat[start:stop] = True
    return flat


def usable(segment) -> np.ndarray:
    """True where a sample may be used: not masked, finite, no filler, positive error."""
    good = ~segment.mask & np.isfinite(segment.flux) & np.isfinite(segment.wave)
    good &= ~flat_runs(np.where(good, segment.flux, 0.0))
    if segment.uncertainty is not None:
        good &= np.isfinite(segment.uncertainty) & (segment.uncertainty > 0)
    return good


def stretches(wave: np.ndarray, good: np.ndarray, widest_hole: int = 6) -> list[slice]:
    """Slices of samples without a gap in wavelength or a long hole in ``good``.

    A step of more than three local steps is a gap, as is a hole of more than
    ``widest_hole`` unusable samples. Slices start and end on usable samples.
    """
    index = np.flatnonzero(good)
    if len(index) == 0:
        return []
    step = np.diff(wave)
    local = np.median(step) if len(step) < 64 else _local_steps(step)
    missing = np.r_[0.0, np.cumsum(step / local - 1.0)]
    cut = (np.diff(index) > widest_hole) | (np.diff(missing[index]) > 2.0)
    starts = index[np.r_[True, cut]]
    stops = index[np.r_[cut, True]] + 1
    return [slice(int(a), int(b)) for a, b in zip(starts, stops)]


def _local_steps(step: np.ndarray) -> np.ndarray:
    """Typical step near each sample: medians of blocks of 64, stretched over the blocks."""
    blocks = len(step) // 64
    medians = np.median(step[: blocks * 64].reshape(blocks, 64), axis=1)
    return medians[np.minimum(np.arange(len(step)) // 64, blocks - 1)]
