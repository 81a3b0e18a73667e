"""Continuum opacity, so that line strengths turn into depths at any temperature.

H minus bound-free and H bound-free after Gray (2008, The Observation and Analysis of Stellar
Photospheres, 3rd ed., ch. 8); electron scattering. Per hydrogen nucleus, cm2.
"""

from __future__ import annotations

import numpy as np

from .levels import ion_fractions

_H_MINUS = (
    1.99654,
    -1.18267e-5,
    2.64243e-6,
    -4.40524e-10,
    3.23992e-14,
    -1.39568e-18,
    2.78701e-23,
)
_THOMSON = 6.6525e-25
_RYDBERG_EV = 13.598
_THRESHOLD = 911.8  # Angstrom; shell n is ionised below n^2 times this


def _h_minus(wave: np.ndarray, theta: float, electron_pressure: float) -> np.ndarray:
    """Bound-free opacity of H minus per neutral hydrogen atom (valid 2250-15000 A)."""
    inside = np.clip(wave, 2250.0, 15000.0)
    cross = np.polyval(_H_MINUS[::-1], inside) * 1e-18
    return 4.158e-10 * cross * electron_pressure * theta**2.5 * 10.0 ** (0.754 * theta)


def _hydrogen(wave: np.ndarray, theta: float) -> np.ndarray:
    """Bound-free opacity of neutral hydrogen per atom, shells 1-12, Gaunt factors one."""
    total = np.zeros_like(wave)
    for n in range(1, 13):
        excitation = _RYDBERG_EV * (1.0 - 1.0 / n**2)
        shell = 1.0449e-26 * wave**3 / n**3 * 10.0 ** (-theta * excitation)
        total += np.where(wave < _THRESHOLD * n * n, shell, 0.0)
    return total


def continuum_opacity(wave, temperature: float, log_pe: float) -> np.ndarray:
    """log10 of the continuum opacity (cm2 per hydrogen nucleus) at vacuum wave (Angstrom).

    temperature in K, log_pe = log10 electron pressure in dyn cm-2.
    """
    wave = np.asarray(wave, dtype=float)
    theta = 5039.778 / temperature
    neutral, ionised = ion_fractions("H", temperature, log_pe)[:2]
    opacity = neutral * (_h_minus(wave, theta, 10.0**log_pe) + _hydrogen(wave, theta))
    return np.log10(opacity + _THOMSON * (ionised + 1e-4))
