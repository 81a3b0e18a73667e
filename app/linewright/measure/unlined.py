"""The pseudo-continuum once more, from the samples that no feature touches.

Lines too weak to stand out of single samples draw the level of a block down by nearly
their mean. The matched filters see them: where either stands out in absorption or in
emission alike, the samples around are left out, and the rest gives the level.
"""

from __future__ import annotations


import numpy as np

from .prepare import Prepared
from .relevel import under_level

LOUD = 3.5  # sigmas of either filter, up or down, beyond which samples are left out
AROUND = 1.0  # line widths on either side
ENOUGH = 0.7  # share of a block that must be left


def without_lines(ready: Prepared, filtered) -> Prepared | None:
    """The segment under a continuum from samples free of features; None where too few are.

    filtered: filter outputs of each stretch, as ``filter_runs`` gives them.
    """
    t = ready.trace
    free = np.zeros(len(t.y), dtype=bool)
    for run, f in zip(ready.runs, filtered, strict=True):
        loud = np.maximum(np.abs(f.level), np.abs(f.curve)) > LOUD
        reach = int(AROUND * np.median(f.fwhm)) + 1
        near = np.convolve(loud, np.ones(2 * reach + 1), mode="full")[reach : reach + len(loud)]
        free[run] = t.good[run] & (near < 0.5)
    if not free.any():
        return None
    return under_level(ready, np.zeros(len(t.y)), free, ENOUGH, 1.0)
