"""Radial velocity: definition, shift and combination.

v = c (lambda_vac / lambda_vac,lab - 1), receding positive (the optical definition, cz).
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from .medium import C_KM_S
from .spectrum import Spectrum


def velocity_of(wave_vac, wave_lab_vac):
    """km/s of a line seen at ``wave_vac``; both vacuum wavelengths in one unit."""
    return C_KM_S * (np.asarray(wave_vac, dtype=float) / np.asarray(wave_lab_vac, float) - 1.0)


def shifted(wave_vac, velocity: float):
    """Vacuum wavelengths seen from a source receding at ``velocity`` km/s."""
    return np.asarray(wave_vac, dtype=float) * (1.0 + velocity / C_KM_S)


def combine(first: float, second: float) -> float:
    """km/s of two velocities one after the other: (1+z) = (1+z1)(1+z2)."""
    return first + second + first * second / C_KM_S


def difference(total: float, part: float) -> float:
    """The velocity that, combined with ``part``, gives ``total``; km/s."""
    return C_KM_S * ((1.0 + total / C_KM_S) / (1.0 + part / C_KM_S) - 1.0)


def shift(spectrum: Spectrum, velocity: float) -> Spectrum:
    """The spectrum with its vacuum wavelengths multiplied by (1 + velocity/c)."""
    segments = tuple(replace(s, wave=shifted(s.wave, velocity)) for s in spectrum.segments)
    return replace(spectrum, segments=segments)
