"""Pseudo-continuum: straight lines between the levels of wide blocks of samples.

Each block, divided by the present continuum, gives one level (see ``level``): pure noise
an unbiased one, crowded absorption its upper edge, and emission lines lift nothing.
"""

from __future__ import annotations

import numpy as np

from .level import SAMPLES, block_levels

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


def fit_continuum(wave, flux, good, sigma, size: float, length: float = 1.0, rounds: int = 2):
    """Nodes (wave, flux, relative error) of the pseudo-continuum of one segment.

    wave, flux: shape (n,); sigma: noise in flux units, shape (n,); size: Angstrom between
    nodes, much wider than a line, narrower than the run of the continuum; length: samples
    per independent noise value.
    """
    blocks = [np.arange(b.start, b.stop)[good[b]] for b in block_edges(wave, good, size)]
    centre = np.array([wave[b].mean() for b in blocks])
    floor = np.array([np.median(sigma[b]) for b in blocks])
    level = _smooth(np.array([np.quantile(flux[b], 0.7) for b in blocks]))
    weight = np.array([len(b) / length / SAMPLES for b in blocks])
    probs = (np.arange(SAMPLES) + 0.5) / SAMPLES
    for _ in range(rounds):
        level = np.maximum(level, floor)
        run = np.interp(wave, centre, level)
        samples = np.array([np.quantile(flux[b] / run[b], probs) for b in blocks])
        noise = np.array([np.median(sigma[b] / run[b]) for b in blocks])
        ratio, error = block_levels(samples, noise, weight)
        level = bridge_dips(centre, np.maximum(level * ratio, floor))
    return centre, level, error


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
