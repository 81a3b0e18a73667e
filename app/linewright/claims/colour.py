"""Colour temperatures: what a black body's slope says of a continuum.

They describe the continuum and nothing else: the Balmer and Paschen continua of A and B stars
are steeper than any black body of their temperature, line blanketing makes cool stars look
cooler, dust reddens. They are never used for level populations.
Planck: B_lambda ~ lambda^-5/(exp(c2/(lambda T)) - 1); Wien: the same without the 1; c2 =
1.438776877e-2 m K (CODATA 2022).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

SECOND_RADIATION = 1.438776877e8  # h c / k, Angstrom K
BLOCKS = 8  # of the jackknife
LEAST_POINTS = 12
COOLEST, HOTTEST = 500.0, 500_000.0  # K
TURNS, CUT = 40, 4.0


@dataclass(frozen=True)
class ColourFit:
    """temperature, error: K (error by a jackknife over stretches of wavelength)
    low, high: Angstrom used; scatter: rms of ln flux about the fit
    """

    temperature: float
    error: float
    low: float
    high: float
    scatter: float


def planck_colour(wave, flux, relative_error=None) -> ColourFit | None:
    """Black body of the continuum's shape.

    wave: vacuum Angstrom, (n,); flux: continuum per unit wavelength, any scale; relative_error:
    of each point. None where fewer than LEAST_POINTS are positive, or no temperature between
    COOLEST and HOTTEST fits (the slope is too steep, or rises to the red beyond reason).
    """
    return _fitted(wave, flux, relative_error, planck=True)


def wien_colour(wave, flux, relative_error=None) -> ColourFit | None:
    """Wien's law of the continuum's shape; arguments and None as in ``planck_colour``."""
    return _fitted(wave, flux, relative_error, planck=False)


def _fitted(wave, flux, relative_error, planck: bool) -> ColourFit | None:
    wave, flux = np.asarray(wave, dtype=float), np.asarray(flux, dtype=float)
    error = np.full(len(wave), 0.01) if relative_error is None else np.asarray(relative_error)
    good = np.isfinite(flux) & (flux > 0) & np.isfinite(error)
    if np.sum(good) < LEAST_POINTS:
        return None
    order = np.argsort(wave[good], kind="stable")
    x, y = wave[good][order], np.log(flux[good][order])
    weight = 1.0 / np.maximum(error[good][order], 0.003) ** 2
    whole, scatter = _solve(x, y, weight, planck)
    if whole is None:
        return None
    block = np.arange(len(x)) * BLOCKS // len(x)
    parts = [_solve(x[block != b], y[block != b], weight[block != b], planck)[0]
             for b in range(BLOCKS)]  # fmt: skip
    inverse = np.array([1.0 / p if p else np.nan for p in parts])
    spread = np.sqrt((BLOCKS - 1) * np.nanvar(inverse))
    return ColourFit(whole, whole**2 * float(spread), float(x[0]), float(x[-1]), scatter)


def _solve(x, y, weight, planck: bool):
    """(T or None, rms) of ln flux = a + ln law, by Gauss-Newton in 1/T, outliers let go."""
    inverse, keep = 1.0 / 7000.0, np.ones(len(x))
    for _ in range(TURNS):
        law, slope = _law(x, inverse, planck)
        root = np.sqrt(weight * keep)
        design = np.column_stack([np.ones(len(x)), slope]) * root[:, None]
        level, step = np.linalg.lstsq(design, (y - law) * root, rcond=None)[0]
        inverse = float(np.clip(inverse + step, 0.2 * inverse, 5 * inverse))
        residual = y - _law(x, inverse, planck)[0]
        residual = residual - np.sum(weight * keep * residual) / np.sum(weight * keep)
        spread = max(1.4826 * float(np.median(np.abs(residual))), 1e-4)
        keep = np.clip(1 - (residual / (CUT * spread)) ** 2, 0.0, 1.0) ** 2 + 1e-9
    temperature = 1.0 / inverse
    inside = COOLEST < temperature < HOTTEST
    return (temperature if inside else None), float(np.std(residual))


def _law(x, inverse: float, planck: bool):
    """(ln of the law without constants, its derivative by 1/T)."""
    z = np.minimum(SECOND_RADIATION / x * inverse, 600.0)
    if not planck:
        return -5 * np.log(x) - z, -SECOND_RADIATION / x
    return -5 * np.log(x) - np.log(np.expm1(z)), -SECOND_RADIATION / x / -np.expm1(-z)
