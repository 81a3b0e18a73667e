"""The level that a block of samples scatters about, lines notwithstanding.

A sample is noise about the level, or noise about something drawn down from it by
absorption or lifted by emission. Depths and heights follow sums of exponentials of fixed
scales (in units of the noise) whose weights are found by expectation-maximisation for
every candidate level; the most probable level wins. The upper edge of crowded absorption
must fall off as the noise does, which is what places the level where no sample is free of
weak lines.
"""

from __future__ import annotations

from functools import lru_cache
from math import erfc, exp, sqrt

import numpy as np

DOWN = (2.0, 6.0, 20.0, 70.0, 250.0, 1000.0)  # scales of absorption, in sigmas
UP = (8.0, 40.0, 200.0, 1000.0)  # scales of emission, in sigmas
PRIOR = np.array([0.5] + [0.4 / len(DOWN)] * len(DOWN) + [0.1 / len(UP)] * len(UP))
PRIOR_SAMPLES = 10.0
OUTLIER = 1e-6
EMISSION_COST = 0.8  # log odds per independent sample against a spectrum all emission
SAMPLES = 128  # quantiles that stand for a block
ROUNDS = 8
_STEP = 0.005
_EDGE = 10.0


@lru_cache(maxsize=1)
def _densities() -> np.ndarray:
    """Density of each part at x = sinh(u), u on a fine even grid, shape (nodes, parts)."""
    x = np.sinh(np.arange(-_EDGE, _EDGE + _STEP / 2, _STEP))
    columns = [np.exp(-0.5 * np.minimum(x * x, 1400.0)) / sqrt(2.0 * np.pi)]
    columns += [_one_sided(-x, scale) for scale in DOWN]
    columns += [_one_sided(x, scale) for scale in UP]
    return np.stack(columns, axis=1) + OUTLIER


def _one_sided(x, scale: float) -> np.ndarray:
    """Unit Gaussian noise plus a positive exponential deviate of ``scale``: its density."""

    def at(v):
        if v < -12.0:
            return 0.0
        return exp(0.5 / scale**2 - v / scale) * 0.5 * erfc((1.0 / scale - v) / sqrt(2.0)) / scale

    return np.array([at(float(v)) for v in x])


def score_levels(samples, levels, sigma, weight) -> np.ndarray:
    """Log posterior of candidate levels, shape (b, g).

    samples: (b, q) of b blocks; levels: (b, g); sigma: (b,) noise of a sample; weight:
    (b,) independent samples that each of the q stands for.
    """
    table = _densities()
    x = (samples[:, None, :] - levels[:, :, None]) / sigma[:, None, None]
    place = (np.arcsinh(x) + _EDGE) / _STEP
    density = table[np.clip(place, 0, len(table) - 1).astype(np.int32)]
    share = np.broadcast_to(PRIOR, (*levels.shape, len(PRIOR))).copy()
    prior = PRIOR * PRIOR_SAMPLES
    each = weight[:, None, None]
    for _ in range(ROUNDS):
        total = (density @ share[..., None])[..., 0]
        counts = share * (np.swapaxes(density, 2, 3) @ (1.0 / total)[..., None])[..., 0] * each
        share = counts + prior
        share /= share.sum(axis=-1, keepdims=True)
    total = (density @ share[..., None])[..., 0]
    lifted = share[..., -len(UP) :].sum(axis=-1) * weight[:, None] * samples.shape[1]
    fit = (np.log(total) * each).sum(axis=-1) + (np.log(share) * prior).sum(axis=-1)
    return fit - EMISSION_COST * lifted


def block_levels(samples, sigma, weight, together: int = 8, tick=lambda: None):
    """(levels, one sigma), each (b,), of b blocks, ``together`` at a time to stay in cache.

    samples: sorted quantiles of each block, (b, q); sigma: (b,); weight: (b,) as in
    ``score_levels``; tick: called after each lot. First the quantiles themselves are tried, then a fine grid about
    the best.
    """
    parts = []
    for i in range(0, len(samples), together):
        few = slice(i, i + together)
        parts.append(_few_levels(samples[few], sigma[few], weight[few]))
        tick()
    levels, errors = zip(*parts, strict=True)
    return np.concatenate(levels), np.concatenate(errors)


def _few_levels(samples, sigma, weight):
    probe = (np.linspace(0.05, 0.98, 24) * samples.shape[1]).astype(int)
    tried = samples[:, probe]
    best = np.argmax(score_levels(samples, tried, sigma, weight), axis=1)
    rows = np.arange(len(samples))
    low = tried[rows, np.maximum(best - 1, 0)] - 0.5 * sigma
    high = tried[rows, np.minimum(best + 1, tried.shape[1] - 1)] + 0.5 * sigma
    for _ in range(2):
        levels = low[:, None] + np.linspace(0, 1, 13) * (high - low)[:, None]
        score = score_levels(samples, levels, sigma, weight)
        best = np.argmax(score, axis=1)
        step = levels[:, 1] - levels[:, 0]
        middle = levels[rows, best]
        reach = np.maximum(1.5 * step, np.minimum(4 * step, 0.6 * sigma))
        low, high = middle - reach, middle + reach
    near = np.exp(score - score.max(axis=1, keepdims=True))
    near /= near.sum(axis=1, keepdims=True)
    mean = (near * levels).sum(axis=1)
    spread = np.sqrt((near * (levels - mean[:, None]) ** 2).sum(axis=1))
    return mean, np.maximum(spread, sigma / np.sqrt(weight * samples.shape[1]))
