"""Strength offset of each species: how far its lines are from the predicted strengths.

The prior is heavy-tailed (Student t), so that a peculiar star is recognised, not refused;
lines that should show and do not push the offset down.
"""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from .curves import BIN, CENTRES, bin_of

SCALE, FREEDOM = 0.4, 3.0  # dex and degrees of freedom of the prior
LEAST_ERROR = 0.05  # dex: the strengths of one species share errors of their own
LINES_FOR_ZERO = 20.0  # seen lines of a population that fix its zero of strength
GRID = np.arange(-15, 16) * BIN
FINE = np.arange(-75, 76) * (BIN / 5)  # fine enough for LEAST_ERROR


def prior_log(scale: float = SCALE):
    """Log prior over GRID."""
    return -0.5 * (FREEDOM + 1) * np.log1p((GRID / scale) ** 2 / FREEDOM)


def detection_log_likelihood(strength, seen, exposure, species, count, curve):
    """(count, len(GRID)) log-likelihood of each species' offset from shown and missing lines.

    strength: (n,) predicted without offset; seen, exposure: (n,); species: (n,) index.
    """
    bins = len(CENTRES)
    key = species * bins + bin_of(strength)
    hits = np.bincount(key, seen, count * bins).reshape(count, bins)
    misses = np.bincount(key, np.maximum(exposure - seen, 0.0), count * bins)
    misses = misses.reshape(count, bins)
    shifted = curve(CENTRES[:, None] + GRID[None, :])
    return hits @ np.log(shifted) + misses @ np.log1p(-shifted)


def strength_log_likelihood(residual, slope, scatter, weight, species, count):
    """(count, len(GRID)) log-likelihood from measured strengths of claimed pairs.

    residual: m - h(S without offset), dex; slope: dh/dS; weight: pair probability.
    """
    table = np.zeros((count, len(GRID)))
    if len(residual) == 0:
        return table
    order = np.argsort(species, kind="stable")
    # Single precision is plenty for a sum over claims, and several times faster.
    base = (residual / scatter)[order].astype(np.float32)
    slant = (slope / scatter)[order].astype(np.float32)
    z = base[None, :] - GRID.astype(np.float32)[:, None] * slant[None, :]
    value = np.log(np.float32(0.9) * np.exp(-0.5 * np.minimum(z * z, 60.0)) + np.float32(0.02))
    value = value * weight[order]
    named = species[order]
    start = np.nonzero(np.concatenate(([True], named[1:] != named[:-1])))[0]
    table[named[start]] = np.add.reduceat(value, start, axis=1).T
    return table


def best_offsets(log_likelihood, scale: float = SCALE):
    """Posterior mean and sigma per species, dex, from (count, len(GRID)) likelihoods."""
    log_posterior = (log_likelihood + prior_log(scale)) @ _refined()
    posterior = np.exp(log_posterior - log_posterior.max(axis=1, keepdims=True))
    posterior /= posterior.sum(axis=1, keepdims=True)
    mean = posterior @ FINE
    sigma = np.sqrt(np.maximum(posterior @ FINE**2 - mean**2, 0.0))
    return mean, np.maximum(sigma, LEAST_ERROR)


@lru_cache(maxsize=1)
def _refined():
    """(len(GRID), len(FINE)): cubic spline through values at GRID, taken at FINE; offsets read
    off the grid alone would jump as the best point changes."""
    from scipy.interpolate import CubicSpline

    return CubicSpline(GRID, np.eye(len(GRID)), bc_type="natural")(FINE).T


def shared_offset(offset, lines) -> float:
    """What the species of a population have in common, dex; 0 where too few lines are seen.

    offset: (n,) dex; lines: (n,) lines seen of each. A mean that a species of odd abundance
    does not move, however many lines it has: species weigh by the square root of theirs,
    and less the farther they stand from the rest (Student t about the median).
    """
    if float(np.sum(lines)) < LINES_FOR_ZERO:
        return 0.0
    weight = np.sqrt(lines)
    order = np.argsort(offset, kind="stable")
    heap = np.cumsum(weight[order])
    centre = float(offset[order][np.searchsorted(heap, 0.5 * heap[-1])])
    for _ in range(5):
        near = weight / (1.0 + ((offset - centre) / SCALE) ** 2 / FREEDOM)
        centre = float(np.sum(near * offset) / np.sum(near))
    return centre
