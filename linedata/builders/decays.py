"""Radiative damping from the decays listed in the catalogue itself."""

from __future__ import annotations

import numpy as np

A_FROM_GF = 1.499194e-16  # gf = this x g_up x A (s-1) x lambda^2 (Angstrom)


def radiative_widths(levels, matches, lines: dict[str, np.ndarray]) -> np.ndarray:
    """log10 of the radiative damping constant (rad s-1); NaN without a level pair.

    The sum of the A of all listed decays of both levels: a lower limit where the list lacks
    strong decays (below 1200 A, above 2.5 micron).
    """
    known = matches.low >= 0
    weight = np.where(known, 2 * np.nan_to_num(levels.j[matches.up], nan=0.5) + 1, 1.0)
    a_value = 10.0 ** lines["loggf"] / (A_FROM_GF * weight * matches.wave**2)
    rate = np.bincount(matches.up[known], a_value[known], minlength=len(levels))
    total = rate[matches.up] + rate[matches.low]
    return np.where(known, np.log10(np.maximum(total, 1.0)), np.nan)
