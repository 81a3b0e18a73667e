"""Pseudo-continuum: the level that the samples of a block scatter about.

Each block of samples, divided by the present continuum, is taken as a mixture: continuum
samples scattered by the noise, samples pulled down by absorption (one-sided exponential),
and samples lifted by emission (one-sided exponential). The level is the most probable one
on a grid, fractions and scales of the tails found by expectation-maximisation. Pure noise
gives an unbiased level, crowded absorption is followed along its upper edge, and emission
lines lift nothing.
"""

from __future__ import annotations

import numpy as np

QUANTILES = 240  # samples of a block that stand for all of it
GRID = 31
ROUNDS = 10
FRACTION_PRIOR = (0.60, 0.30, 0.10)  # continuum, absorption, emission
PRIOR_SAMPLES = 12.0


def _tail(x, scale):
    """Density of a one-sided exponential blurred by unit noise (x in sigmas, logistic step)."""
    return np.exp(-np.clip(x, 0, None) / scale) / (scale + 0.7) / (1.0 + np.exp(-1.702 * x))


def level_likelihood(samples: np.ndarray, levels: np.ndarray, sigma: float) -> np.ndarray:
    """Log likelihood of each level, shape (g,).

    samples: sorted quantiles of a block, shape (q,); sigma: their noise, same unit.
    """
    x = np.clip((samples[None, :] - levels[:, None]) / sigma, -1e4, 1e4)
    core = np.exp(-0.5 * x**2) / np.sqrt(2.0 * np.pi)
    share = np.tile(np.array(FRACTION_PRIOR), (len(levels), 1))
    down = np.full((len(levels), 1), 30.0)
    up = np.full((len(levels), 1), 30.0)
    prior = np.array(FRACTION_PRIOR) * PRIOR_SAMPLES
    for _ in range(ROUNDS):
        parts = np.stack([core, _tail(-x, down), _tail(x, up)]) * share.T[:, :, None]
        total = parts.sum(axis=0) + 1e-300
        weight = parts / total
        counts = weight.sum(axis=2).T + prior
        share = counts / counts.sum(axis=1, keepdims=True)
        down = _scale(weight[1], -x)
        up = _scale(weight[2], x)
    return np.log(total).sum(axis=1) + (prior * np.log(share)).sum(axis=1)


def _scale(weight, x):
    """Mean excess of a tail in sigmas, between 3 (a tail is not noise) and 3e3."""
    mean = (weight * np.clip(x, 0, None)).sum(axis=1) / (weight.sum(axis=1) + 1e-9)
    return np.clip(mean, 3.0, 3e3)[:, None]


def block_level(values: np.ndarray, sigma: float) -> tuple[float, float]:
    """(level, one sigma) of one block of samples with noise ``sigma``."""
    low, high = np.quantile(values, [0.05, 0.995])
    probs = (np.arange(min(QUANTILES, len(values))) + 0.5) / min(QUANTILES, len(values))
    samples = np.quantile(values, probs)
    for _ in range(3):
        levels = np.linspace(low, high, GRID)
        score = level_likelihood(samples, levels, sigma)
        best = int(np.argmax(score))
        step = levels[1] - levels[0]
        if step < 0.1 * sigma:
            break
        low, high = levels[best] - 2 * step, levels[best] + 2 * step
    near = np.exp(score - score[best])
    mean = float((near * levels).sum() / near.sum())
    spread = float(np.sqrt((near * (levels - mean) ** 2).sum() / near.sum()))
    return mean, max(spread, 0.05 * sigma)


def block_edges(wave, good, size: float, least: int = 60) -> list[slice]:
    """Index slices of about ``size`` Angstrom holding at least ``least`` usable samples."""
    count = max(1, int(round((wave[-1] - wave[0]) / size)))
    edges = np.searchsorted(wave, np.linspace(wave[0], wave[-1], count + 1))
    edges[-1] = len(wave)
    blocks = []
    start = 0
    for stop in edges[1:]:
        if good[start:stop].sum() >= least or stop == edges[-1]:
            if stop > start and good[start:stop].any():
                blocks.append(slice(int(start), int(stop)))
            start = stop
    return blocks


def fit_continuum(wave, flux, good, sigma, size: float):
    """Nodes (wave, flux, relative error) of the pseudo-continuum of one segment.

    wave, flux: shape (n,); sigma: noise in flux units, shape (n,); size: Angstrom between
    nodes, much wider than a line, narrower than the run of the continuum.
    """
    blocks = block_edges(wave, good, size)
    centre = np.array([wave[b][good[b]].mean() for b in blocks])
    start = np.array([np.quantile(flux[b][good[b]], 0.7) for b in blocks])
    level = _smooth(start)
    floor = np.array([np.median(sigma[b][good[b]]) for b in blocks])
    error = np.full(len(level), 0.01)
    for round_ in range(3):
        level = np.maximum(level, floor)
        run = np.interp(wave, centre, level)
        pairs = [
            block_level(flux[b][good[b]] / run[b][good[b]],
                        float(np.median(sigma[b][good[b]] / run[b][good[b]])))
            for b in blocks
        ]
        ratio, error = np.array(pairs).T
        level = np.maximum(level * ratio, floor)
        if round_ < 2:
            level = bridge_dips(centre, level)
    return centre, bridge_dips(centre, level), error


def _smooth(values: np.ndarray) -> np.ndarray:
    """Running median of three."""
    if len(values) < 3:
        return values.copy()
    padded = np.r_[values[0], values, values[-1]]
    return np.median(np.stack([padded[:-2], padded[1:-1], padded[2:]]), axis=0)


def bridge_dips(centre: np.ndarray, level: np.ndarray) -> np.ndarray:
    """Nodes that stand apart from the line through their neighbours are drawn to it.

    A broad line (H alpha wings, a band) wider than a block lowers one node or two; the
    continuum does not follow it. Apart means more than four robust sigmas (and 0.3 %).
    """
    if len(level) < 5:
        return level
    out = level.copy()
    for reach in (1, 2):
        left, right = out[: -2 * reach], out[2 * reach :]
        share = (centre[reach:-reach] - centre[: -2 * reach]) / (
            centre[2 * reach :] - centre[: -2 * reach]
        )
        middle = left + share * (right - left)
        apart = out[reach:-reach] / np.maximum(middle, 1e-300) - 1.0
        scatter = max(1.4826 * float(np.median(np.abs(apart))), 7.5e-4)
        bad = np.abs(apart) > 4.0 * scatter
        # only the worst of neighbours: a bad node spoils its neighbours' comparison
        worst = np.abs(apart) >= np.maximum(
            np.r_[0.0, np.abs(apart[:-1])], np.r_[np.abs(apart[1:]), 0.0]
        )
        change = bad & worst
        out[reach:-reach][change] = middle[change]
    return out
