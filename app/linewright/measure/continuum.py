"""Pseudo-continuum: straight lines between the levels of wide blocks of samples.

Each block, divided by the present continuum, gives one level (see ``level``): pure noise
an unbiased one, crowded absorption its upper edge, and emission lines lift nothing.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from .level import SAMPLES, block_levels
from .tops import over_tops

ROUNDS = 2
ROUGH = 1e-3  # run of the continuum inside a block that straight nodes cannot follow
JUMP = 0.2  # change of the logarithm from node to node that asks for nodes closer together
HALVINGS = 3
LEAST = 60  # samples of a block


@dataclass(frozen=True)
class Spacing:
    """size: Angstrom between nodes, much wider than a line, narrower than the run of the
    continuum; length: samples per independent noise value; tick: called now and then, so that
    a window can go on."""

    size: float
    length: float = 1.0
    tick: Callable[[], None] = field(default=lambda: None, compare=False)


def block_edges(wave, good, size: float, least: int = LEAST) -> list[slice]:
    """Index slices of about ``size`` Angstrom holding at least ``least`` usable samples."""
    count = max(1, int(round((wave[-1] - wave[0]) / size)))
    edges = np.searchsorted(wave, np.linspace(wave[0], wave[-1], count + 1))
    edges[-1] = len(wave)
    least = max(least, 0.4 * good.sum() / count)
    blocks = []
    start = 0
    for stop in edges[1:]:
        if good[start:stop].sum() >= least:
            blocks.append(slice(int(start), int(stop)))
            start = stop
    if not blocks:
        return [slice(0, len(wave))]
    blocks[-1] = slice(blocks[-1].start, len(wave))
    return blocks


def fit_continuum(wave, flux, good, sigma, spacing: Spacing):
    """Nodes (wave, flux, relative error) of the pseudo-continuum of one segment.

    wave, flux: shape (n,); good: usable; sigma: noise in flux units, shape (n,). Under
    emission lines, blocks at a jump (the edge of a recombination continuum, as at the
    Paschen limit) are halved until the nodes follow it.
    """
    blocks = [np.arange(b.start, b.stop)[good[b]] for b in block_edges(wave, good, spacing.size)]
    level = _smooth(np.array([np.quantile(flux[b], 0.7) for b in blocks]))
    bright = in_emission(flux[good])
    # beside the wings of a bright line a node looks like a dip: none is bridged there
    settle = (lambda centre, level: level) if bright else bridge_dips
    nodes = _nodes((wave, flux, sigma), blocks, level, spacing, settle)
    for _ in range(HALVINGS if bright else 0):
        halved = _halved(blocks, nodes[1])
        if len(halved) == len(blocks):
            break
        blocks = halved
        level = np.interp([wave[b].mean() for b in blocks], *nodes[:2])
        nodes = _nodes((wave, flux, sigma), blocks, level, spacing, settle)
    if bright:
        return nodes
    run = smooth_run(wave[good], *nodes[:2])
    return over_tops((wave[good], flux[good], sigma[good]), nodes, run)


def in_emission(flux) -> bool:
    """Whether the highest samples stand out far more than the lowest: bright lines, between
    which the samples speak for themselves. flux: usable samples."""
    low, middle, high = np.quantile(flux, [0.002, 0.5, 0.998])
    return bool(high - middle > 5.0 * (middle - low))


def _halved(blocks, level) -> list[np.ndarray]:
    """``blocks`` with those on either side of a jump cut in two, where enough is left."""
    jump = np.abs(np.diff(np.log(level))) > JUMP
    beside = np.r_[jump, False] | np.r_[False, jump]
    out = []
    for block, cut in zip(blocks, beside, strict=True):
        out += np.array_split(block, 2) if cut and len(block) >= 2 * LEAST else [block]
    return out


def _nodes(samples, blocks, level, spacing: Spacing, settle):
    """(wave, flux, relative error) of one node for each block of sample indices.

    samples: (wave, flux, sigma); level: of each to start from; settle: takes broad
    lines out of (centre, level).
    """
    wave, flux, sigma = samples
    centre = np.array([wave[b].mean() for b in blocks])
    floor = np.array([np.median(sigma[b]) for b in blocks])
    weight = np.array([len(b) / spacing.length / SAMPLES for b in blocks])
    probs = (np.arange(SAMPLES) + 0.5) / SAMPLES
    for _ in range(ROUNDS):
        level = np.maximum(level, floor)
        run = smooth_run(wave, centre, level)
        ratios = np.array([np.quantile(flux[b] / run[b], probs) for b in blocks])
        noise = np.array([np.hypot(np.median(sigma[b] / run[b]), ROUGH) for b in blocks])
        spacing.tick()
        ratio, error = block_levels(ratios, noise, weight, tick=spacing.tick)
        level = settle(centre, np.maximum(level * ratio, floor))
    bent = np.minimum(0.25 * np.abs(_apart(centre, level)), 0.03)
    return centre, level, np.hypot(np.minimum(error, 0.03), bent)


def smooth_run(wave, centre, level) -> np.ndarray:
    """Monotone cubic through the nodes (Fritsch & Butland 1984), straight beyond the ends."""
    if len(centre) < 3:
        return np.interp(wave, centre, level)
    h, d = np.diff(centre), np.diff(level) / np.diff(centre)
    slope = np.r_[d[0], np.zeros(len(d) - 1), d[-1]]
    same_sign = d[:-1] * d[1:] > 0
    w1, w2 = 2 * h[1:] + h[:-1], h[1:] + 2 * h[:-1]
    with np.errstate(divide="ignore", invalid="ignore"):
        mean = (w1 + w2) / (w1 / d[:-1] + w2 / d[1:])
    slope[1:-1] = np.where(same_sign, mean, 0.0)
    at = np.clip(wave, centre[0], centre[-1])
    i = np.clip(np.searchsorted(centre, at) - 1, 0, len(h) - 1)
    t = (at - centre[i]) / h[i]
    ends = level[i] * (1 + 2 * t) * (1 - t) ** 2 + level[i + 1] * t * t * (3 - 2 * t)
    inside = ends + h[i] * (slope[i] * t * (1 - t) ** 2 - slope[i + 1] * t * t * (1 - t))
    beyond = np.where(wave < centre[0], slope[0], slope[-1]) * (wave - at)
    return inside + np.clip(beyond, -0.2 * np.abs(inside), 0.2 * np.abs(inside))


def _apart(centre, level, reach: int = 1) -> np.ndarray:
    """Relative distance of each node from the line through its neighbours, (k,); ends 0."""
    out = np.zeros(len(level))
    if len(level) <= 2 * reach:
        return out
    left, right = level[: -2 * reach], level[2 * reach :]
    share = (centre[reach:-reach] - centre[: -2 * reach]) / (
        centre[2 * reach :] - centre[: -2 * reach]
    )
    middle = left + share * (right - left)
    out[reach:-reach] = level[reach:-reach] / np.maximum(middle, 1e-300) - 1.0
    return out


def _smooth(values: np.ndarray) -> np.ndarray:
    """Running median of three."""
    if len(values) < 3:
        return values.copy()
    padded = np.r_[values[0], values, values[-1]]
    return np.median(np.stack([padded[:-2], padded[1:-1], padded[2:]]), axis=0)


def bridge_dips(centre: np.ndarray, level: np.ndarray) -> np.ndarray:
    """Isolated dips of the nodes are drawn up to the line through their neighbours.

    A broad line (H alpha wings) wider than a block lowers one node or two; the continuum
    does not follow it. A dip stands lower than four robust sigmas of such distances (and
    0.3 %) but no more than 8 %: deeper ones are the spectrum's own shape.
    """
    out = level.copy()
    for reach in (1, 2):
        apart = _apart(centre, out, reach)
        if len(apart) < 2 * reach + 7:
            break
        scatter = max(1.4826 * float(np.median(np.abs(apart))), 7.5e-4)
        deepest = apart <= np.minimum(np.r_[0.0, apart[:-1]], np.r_[apart[1:], 0.0])
        dip = (apart < -4.0 * scatter) & (apart > -0.08) & deepest
        out[dip] /= 1.0 + apart[dip]
    return out
