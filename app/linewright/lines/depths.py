"""From predicted strength to central depth: a saturating relation.

With x = S - zero point, depth = 0.9 y / (1 + y), y = 10^(0.8 x) for x < 0 and 10^(0.5 x)
above: the median depth of 1,400 isolated lines of the Sun at R = 47,000 within 0.03. Rotation
and lower resolving power make real lines shallower; the relation ranks and filters lines, it
does not measure abundances.
"""

from __future__ import annotations

import numpy as np

from .catalogue import LineCatalogue
from .continuum import continuum_opacity
from .strengths import absorption_strength

DEEPEST = 0.9
WEAK_SLOPE, STRONG_SLOPE = 0.8, 0.5
# S at which a solar line has depth 0.45, less log10 of the continuum opacity there.
LINE_TO_CONTINUUM = 24.39
_PRESSURE_T = (3000.0, 4000.0, 5000.0, 5800.0, 7000.0, 8500.0, 10000.0, 15000.0, 30000.0)
_PRESSURE = (-0.8, 0.2, 1.0, 1.4, 2.0, 2.6, 2.8, 3.0, 3.5)


def typical_log_pe(temperature: float) -> float:
    """log10 electron pressure (dyn cm-2) where the lines of a dwarf form; nominal, +-0.5 dex."""
    return float(np.interp(temperature, _PRESSURE_T, _PRESSURE))


def zero_point(wave, temperature: float, log_pe: float) -> np.ndarray:
    """Strength S at which a line at vacuum wave (Angstrom) is half as deep as lines get."""
    return LINE_TO_CONTINUUM + continuum_opacity(wave, temperature, log_pe)


def predicted_depth(strength, zero) -> np.ndarray:
    """Central depth (0-0.9) of lines of strength S; NaN stays NaN.

    zero: the strength of a line of depth 0.45 (scalar or one per line).
    """
    x = np.asarray(strength, dtype=float) - zero
    y = 10.0 ** (np.where(x < 0, WEAK_SLOPE, STRONG_SLOPE) * np.clip(x, -30.0, 30.0))
    return DEEPEST * y / (1.0 + y)


def catalogue_depths(
    catalogue: LineCatalogue, temperature: float, log_pe: float | None = None
) -> np.ndarray:
    """Predicted depth of every line, shape (n,): stellar and interstellar lines by strength at
    this temperature (K), telluric ones 1 - exp(-optical depth); NaN for the rest.
    """
    pressure = typical_log_pe(temperature) if log_pe is None else log_pe
    strength = absorption_strength(catalogue, temperature, pressure)
    depth = predicted_depth(strength, zero_point(catalogue.wave, temperature, pressure))
    telluric = np.isfinite(catalogue.depth_ref)
    return np.where(telluric, 1.0 - np.exp(-np.nan_to_num(catalogue.depth_ref)), depth)
