"""Where labels go along a line: none overlapping, order kept, the important ones first.

Positions are in points. Leaders of labels in the order of their anchors never cross.
"""

from __future__ import annotations

import numpy as np


def spread(anchors, pitch: float, low: float, high: float) -> np.ndarray:
    """Positions nearest to ascending ``anchors``, at least ``pitch`` apart, in low..high.

    Least squares: with z_i = x_i - i pitch the problem is isotonic regression (solved by
    pooling adjacent violators), and the bounds clip its solution (Barlow et al. 1972,
    Statistical Inference under Order Restrictions; from memory). The caller sees to it
    that all fit: (n - 1) pitch <= high - low.
    """
    anchors = np.asarray(anchors, dtype=float)
    steps = pitch * np.arange(len(anchors))
    level = np.clip(_isotonic(anchors - steps), low, high - (steps[-1] if len(steps) else 0.0))
    return level + steps


def _isotonic(values: np.ndarray) -> np.ndarray:
    means: list[float] = []
    counts: list[int] = []
    for value in values.tolist():
        mean, count = value, 1
        while means and means[-1] > mean:
            before, weight = means.pop(), counts.pop()
            mean = (before * weight + mean * count) / (weight + count)
            count += weight
        means.append(mean)
        counts.append(count)
    return np.repeat(means, counts)


def choose(anchors, order, pitch: float, low: float, high: float, reach: float):
    """(indices kept, positions), ascending by anchor.

    anchors: ascending positions; order: indices, the most important first. A label is
    left out where it finds no room or would push one farther than ``reach`` from its anchor.
    """
    anchors = np.asarray(anchors, dtype=float)
    kept: list[int] = []
    places = np.zeros(0)
    room = int((high - low) // pitch) + 1 if high >= low else 0
    for index in order:
        if len(kept) >= room:
            break
        trial = sorted([*kept, int(index)])
        tried = spread(anchors[trial], pitch, low, high)
        if np.abs(tried - anchors[trial]).max() <= reach:
            kept, places = trial, tried
    return np.array(kept, dtype=int), places
