"""Several ways to a pseudo-continuum behind one interface.

Each takes (wave, flux, good, sigma, spacing) and gives nodes (wave, level, relative error).
    levels      mixture levels of blocks (this project's; the default)
    quantile    a high quantile of each block, smoothed: quick, blind to crowding
    clipped     a Legendre series fitted again and again without what lies far below (2 sigma)
                or above (4 sigma) it: sigma clipping, the usual way for a slow response
    asymmetric  asymmetric least squares (Eilers & Boelens 2005, after Whittaker 1923): a
                smooth curve for which samples below weigh a hundredth
"""

from __future__ import annotations

import numpy as np

from ..errors import InputRefused
from .continuum import block_edges, fit_continuum

UPPER = 0.85
ROUNDS = 15


def method_of(method: str):
    """The function of a named method; raises InputRefused on an unknown name."""
    if method not in METHODS:
        raise InputRefused(f"continuum method '{method}'", "is not known",
                           f"choose {', '.join(METHODS)}")
    return METHODS[method]


def _blocks(wave, good, spacing):
    return [np.arange(b.start, b.stop)[good[b]] for b in block_edges(wave, good, spacing.size)]


def _quantile(wave, flux, good, sigma, spacing):
    blocks = _blocks(wave, good, spacing)
    centre = np.array([wave[b].mean() for b in blocks])
    # the quantile of pure noise above its level is taken off
    level = np.array([np.quantile(flux[b], UPPER) - 1.0364 * np.median(sigma[b]) for b in blocks])
    spread = np.array([np.median(sigma[b]) * np.sqrt(2.3 * spacing.length / len(b))
                       for b in blocks])
    return centre, level, spread / np.maximum(np.abs(level), 1e-300)


def _clipped(wave, flux, good, sigma, spacing):
    centre = np.array([wave[b].mean() for b in _blocks(wave, good, spacing)])
    degree = int(np.clip(len(centre) // 2, 1, 9))
    x = 2.0 * (wave - wave[0]) / (wave[-1] - wave[0]) - 1.0
    keep = good.copy()
    for _ in range(ROUNDS):
        series = np.polynomial.Legendre.fit(x[keep], flux[keep], degree, domain=[-1, 1])
        rest = (flux - series(x)) / sigma
        scatter = max(1.0, 1.4826 * float(np.median(np.abs(rest[keep]))))
        new = good & (rest > -2.0 * scatter) & (rest < 4.0 * scatter)
        if new.sum() < 3 * (degree + 1) or np.array_equal(new, keep):
            break
        keep = new
    level = series(np.interp(centre, wave, x))
    error = np.median(sigma) * np.sqrt((degree + 1) * spacing.length / keep.sum())
    return centre, level, np.full(len(centre), error) / np.maximum(np.abs(level), 1e-300)


def _asymmetric(wave, flux, good, sigma, spacing):
    from scipy.linalg import solveh_banded

    size = max(1, len(wave) // 4000)
    count = len(wave) // size
    grid = slice(0, count * size)
    used = good[grid].reshape(count, size)
    y = np.where(used, flux[grid].reshape(count, size), 0.0).sum(axis=1) / np.maximum(
        used.sum(axis=1), 1)
    at = wave[grid].reshape(count, size).mean(axis=1)
    stiff = (spacing.size / np.median(np.diff(at)) / 2.0) ** 4
    weight = (used.sum(axis=1) > 0).astype(float)
    for _ in range(ROUNDS):
        z = solveh_banded(_whittaker(weight, stiff), weight * y, lower=False)
        weight = np.where(y < z, 0.01, 1.0) * (used.sum(axis=1) > 0)
    centre = np.array([wave[b].mean() for b in _blocks(wave, good, spacing)])
    level = np.interp(centre, at, z)
    return centre, level, np.full(len(centre), 0.3 * np.median(sigma)) / np.maximum(
        np.abs(level), 1e-300)


def _whittaker(weight, stiff: float) -> np.ndarray:
    """Upper bands of diag(weight) + stiff D'D, D second differences."""
    n = len(weight)
    bands = np.zeros((3, n))
    bands[2] = weight + 1e-9
    for offsets, value in ((0, 1.0), (1, 4.0), (2, 1.0)):
        bands[2, offsets : n - 2 + offsets] += stiff * value
    bands[1, 1 : n - 1] -= 2.0 * stiff
    bands[1, 2:n] -= 2.0 * stiff
    bands[0, 2:] += stiff
    return bands


METHODS = {
    "levels": fit_continuum, "quantile": _quantile, "clipped": _clipped,
    "asymmetric": _asymmetric,
}
