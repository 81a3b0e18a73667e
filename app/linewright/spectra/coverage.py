"""Where a spectrum was really seen: gaps and masks excluded.

A step of more than GAP_FACTOR times the local median step is a gap. A masked run of
MASK_RUN samples or more is left out too; shorter ones are bridged, since a line is wider.
"""

from __future__ import annotations

import itertools

import numpy as np

from .clean import runs_of
from .spectrum import Segment, Spectrum

GAP_FACTOR = 3.5
MASK_RUN = 3
_BLOCK = 64


def local_step(wave: np.ndarray) -> np.ndarray:
    """Median step around each step, shape (n-1,).

    The largest median among a block of 64 and its neighbours, so that a change of
    dispersion inside a block is no gap.
    """
    steps = np.diff(wave)
    if len(steps) <= _BLOCK:
        return np.full(len(steps), np.median(steps)) if len(steps) else steps
    whole = len(steps) // _BLOCK
    medians = np.median(steps[: whole * _BLOCK].reshape(whole, _BLOCK), axis=1)
    padded = np.pad(medians, 1, mode="edge")
    medians = np.maximum(np.maximum(padded[:-2], padded[2:]), medians)
    return medians[np.minimum(np.arange(len(steps)) // _BLOCK, whole - 1)]


def _bad(segment: Segment) -> np.ndarray:
    return segment.mask | ~np.isfinite(segment.flux)


def _long_masks(segment: Segment) -> list[tuple[int, int]]:
    """(first, last + 1) of masked runs that count: long ones and those at the ends."""
    size = len(segment.wave)
    return [(int(a), int(b)) for a, b in zip(*runs_of(_bad(segment)))
            if b - a >= MASK_RUN or a == 0 or b == size]


def gap_steps(segment: Segment) -> np.ndarray:
    """Indices of the steps (sample i to i + 1) that are gaps."""
    steps = np.diff(segment.wave)
    return np.flatnonzero(steps > GAP_FACTOR * local_step(segment.wave))


def segment_coverage(segment: Segment) -> list[tuple[float, float]]:
    """Ranges (low, high), vacuum Angstrom, from first to last good sample of each stretch."""
    size = len(segment.wave)
    good = np.ones(size, dtype=bool)
    for start, stop in _long_masks(segment):
        good[start:stop] = False
    ranges = []
    cuts = gap_steps(segment) + 1
    for start, stop in zip(*runs_of(good)):
        inside = cuts[(cuts > start) & (cuts < stop)]
        bounds = [start, *inside.tolist(), stop]
        ranges += [(float(segment.wave[a]), float(segment.wave[b - 1]))
                   for a, b in itertools.pairwise(bounds) if b - a >= 2]
    return ranges


def coverage(spectrum: Spectrum) -> tuple[tuple[float, float], ...]:
    """Searched ranges, vacuum Angstrom, ascending; those of overlapping segments united."""
    ranges = sorted(r for s in spectrum.segments for r in segment_coverage(s))
    merged: list[list[float]] = []
    for low, high in ranges:
        if merged and low <= merged[-1][1]:
            merged[-1][1] = max(merged[-1][1], high)
        else:
            merged.append([low, high])
    return tuple((low, high) for low, high in merged)


def gaps(spectrum: Spectrum) -> tuple[tuple[float, float], ...]:
    """The ranges between stretches of coverage, vacuum Angstrom, ascending."""
    covered = coverage(spectrum)
    return tuple((a[1], b[0]) for a, b in itertools.pairwise(covered))
