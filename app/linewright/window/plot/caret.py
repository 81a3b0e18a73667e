"""Peaks and troughs in view, so that the keyboard can reach what the mouse can click."""

from __future__ import annotations

import numpy as np

from .extremes import Columns
from .spectrum_item import Reduced

# A turning point counts when it stands out by this share of the flux range in view.
PROMINENCE = 0.03
# ... on both sides within this many pixels: the end of a plateau is no peak.
REACH = 40.0


def outline(reduced: list[Reduced]) -> tuple[np.ndarray, np.ndarray]:
    """(pixel, flux) in order of pixel: the samples, or low and high of each column."""
    parts = []
    for part in reduced:
        if part.columns is not None:
            parts.append(_column_outline(part.columns))
        parts.extend(part.runs)
    if not parts:
        return np.zeros(0), np.zeros(0)
    pixel = np.concatenate([p[0] for p in parts])
    flux = np.concatenate([p[1] for p in parts])
    order = np.argsort(pixel, kind="stable")
    return pixel[order], flux[order]


def _column_outline(columns: Columns) -> tuple[np.ndarray, np.ndarray]:
    good = np.isfinite(columns.low)
    pixel = np.repeat(columns.column[good] + 0.5, 2)
    low, high = columns.low[good], columns.high[good]
    # In the order the line runs, or a steep flank would look like a zigzag.
    falling = columns.last[good] < columns.first[good]
    flux = np.where(falling, [high, low], [low, high]).T.ravel()
    return pixel, flux


def turning_points(pixel: np.ndarray, flux: np.ndarray) -> np.ndarray:
    """Pixels of the peaks and troughs that stand out on both sides, ascending."""
    if len(flux) < 3:
        return np.zeros(0)
    needed = PROMINENCE * float(np.max(flux) - np.min(flux))
    turns = _zigzag(flux, needed)
    return np.array([pixel[i] for i, sign in turns if _stands_out((pixel, flux), i, sign * needed)])


def _stands_out(line, i: int, needed: float) -> bool:
    """Whether the flux falls (needed < 0: rises) by that much on both sides of sample i."""
    pixel, flux = line
    first, last = np.searchsorted(pixel, [pixel[i] - REACH, pixel[i] + REACH])
    fall = (flux[i] - flux[first:last]) * np.sign(needed)
    before, after = fall[: i - first], fall[i - first :]
    return bool(np.any(before >= abs(needed)) and np.any(after >= abs(needed)))


def _zigzag(flux: np.ndarray, needed: float) -> list[tuple[int, int]]:
    """(sample, +1 peak or -1 trough) of each turn the flux came back from by ``needed``."""
    found, best, direction = [], 0, 0
    for i in range(1, len(flux)):
        change = float(flux[i] - flux[best])
        if direction == 0:
            if abs(change) > needed:
                direction, best = (1 if change > 0 else -1), i
        elif change * direction > 0:
            best = i
        elif -change * direction > needed:
            found.append((best, direction))
            direction, best = -direction, i
    return found
