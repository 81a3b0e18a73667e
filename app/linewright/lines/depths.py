"""From predicted strength to central depth: a saturating relation.

With x = S - zero point, depth = 0.9 y / (1 + y), y = 10^(0.8 x) for x < 0 and 10^(0.5 x)
above: the median depth of 1,400 isolated lines of the Sun at R = 47,000 within 0.03. Away from
5500 A the depth follows the contrast between the line-forming and the continuum layer (Planck
functions), and x falls by log10 of the wavelength (both tuned on predicted masks of a K5 and an
F5 dwarf, rank correlation 0.85 -> 0.90). Rotation and lower resolving power make real lines
shallower; the relation ranks and filters lines, it does not measure abundances.
"""

from __future__ import annotations

import numpy as np

from .catalogue import LineCatalogue
from .continuum import continuum_opacity
from .strengths import absorption_strength

DEEPEST = 0.9
DEEPEST_ANYWHERE = 0.97
REFERENCE_WAVE = 5500.0  # Angstrom
# Temperatures of the layers where lines and continuum form, over that of the lines' excitation.
LINE_LAYER, CONTINUUM_LAYER = 0.9, 1.0 / 0.85
SECOND_RADIATION = 1.438777e8  # h c / k, Angstrom K
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


def contrast(wave, temperature: float) -> np.ndarray:
    """1 - B(line layer)/B(continuum layer) at vacuum wave (Angstrom), over its value at 5500 A.

    temperature: excitation temperature of the lines, K.
    """
    reach = np.array([LINE_LAYER, CONTINUUM_LAYER]) * temperature

    def step(w):
        x = np.clip(SECOND_RADIATION / np.asarray(w, dtype=float), 0.0, 600.0 * reach[0])
        return 1.0 - np.expm1(x / reach[1]) / np.expm1(x / reach[0])

    return step(wave) / step(REFERENCE_WAVE)


def catalogue_depths(
    catalogue: LineCatalogue, temperature: float, log_pe: float | None = None
) -> np.ndarray:
    """Predicted depth of every line, shape (n,): stellar and interstellar lines by strength at
    this temperature (K), telluric ones 1 - exp(-optical depth); NaN for the rest.
    """
    pressure = typical_log_pe(temperature) if log_pe is None else log_pe
    strength = absorption_strength(catalogue, temperature, pressure)
    zero = zero_point(catalogue.wave, temperature, pressure)
    zero = zero + np.log10(catalogue.wave / REFERENCE_WAVE)
    depth = predicted_depth(strength, zero) * contrast(catalogue.wave, temperature)
    depth = np.minimum(depth, DEEPEST_ANYWHERE)
    telluric = np.isfinite(catalogue.depth_ref)
    return np.where(telluric, 1.0 - np.exp(-np.nan_to_num(catalogue.depth_ref)), depth)
