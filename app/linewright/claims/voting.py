"""Velocity by maximum-likelihood voting of features against predicted lines."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..spectra.medium import C_KM_S

DECLARE_MARGIN = 8.0  # log-likelihood over the best elsewhere; measured, see the study
CELLS = 50_000  # features x velocities scored at once: what a processor's cache holds
OUTLIER_SHARE = 0.25  # prior share of features the list does not explain
TAIL_WIDTH, REACH = 3.0, 4.0  # sigma: of the position errors' tail; cut of a kernel


@dataclass(frozen=True, eq=False)
class Vote:
    """Outcome of a vote: km/s; ``score`` is the log-likelihood over ``grid``; ``width`` the
    typical error of one feature."""

    velocity: float
    error: float
    margin: float
    rivals: tuple[tuple[float, float], ...]
    grid: np.ndarray
    score: np.ndarray
    width: float = 1.0

    @property
    def declared(self) -> bool:
        return self.margin >= DECLARE_MARGIN

    @property
    def certainty(self) -> float:
        """Probability that the velocity is right: 1 once declared, else 1 - exp(-margin/2),
        half the margin being what repeated features of one list are worth."""
        return 1.0 if self.declared else float(1.0 - np.exp(-0.5 * max(self.margin, 0.0)))


def line_weights(strength, expected: float):
    """Prior probability that a line shows, from its rank among the strengths.

    strength: (n,) log10; expected: about how many lines should show. Falls as the 1.5th
    power of rank beyond ``expected`` (a soft detection threshold).
    """
    rank = np.empty(len(strength))
    rank[np.argsort(-strength, kind="stable")] = np.arange(1, len(strength) + 1)
    return 0.9 / (1.0 + (rank / max(expected, 1.0)) ** 2.0)


def vote(features, lines, velocity_range, outliers=OUTLIER_SHARE, tail=0.0) -> Vote:
    """Score every velocity in ``velocity_range`` (km/s).

    features: (vacuum wavelengths, errors), Angstrom, (f,) each; lines: (vacuum wavelengths,
    ascending, Angstrom; prior of showing), (n,) each; outliers: prior share of features the
    list does not explain, one for all or (f,); tail: share of positions with errors
    ``TAIL_WIDTH`` times as large.
    """
    wave, sigma = features
    low, high = velocity_range
    width = np.maximum(C_KM_S * np.asarray(sigma) / np.asarray(wave), 0.05)
    step = float(np.clip(np.percentile(width, 20) / 2.0, 0.05, 20.0))
    grid = np.arange(low, high + step, step)
    score = np.zeros(len(grid))
    share = np.broadcast_to(np.asarray(outliers, dtype=float), width.shape)
    rows = max(1, CELLS // len(grid))
    for start in range(0, len(width), rows):
        some = slice(start, start + rows)
        voters = (np.asarray(wave, dtype=float)[some], width[some], share[some])
        score += _summed(voters, *lines, (grid, tail))
    return summarise(grid, score, float(np.median(width)))


def _summed(features, line_wave, weight, setting):
    """Summed log-likelihood of some features (wave, width, outliers) over the grid.

    setting: (grid, share of the tail). A feature's density of line explanations counts
    relative to chance; a feature no line can reach says nothing.
    """
    (x, width, outliers), (grid, tail) = features, setting
    first = np.searchsorted(line_wave, x / (1 + grid[-1] / C_KM_S))
    last = np.searchsorted(line_wave, x / (1 + grid[0] / C_KM_S))
    heaped = np.concatenate(([0.0], np.cumsum(weight)))
    mean = (heaped[last] - heaped[first]) / (grid[-1] - grid[0])
    used = mean > 0
    owner, line = _runs(first, np.where(used, last - first, 0))
    velocity = C_KM_S * (x[owner] / line_wave[line] - 1.0)
    amount = weight[line] / (mean + (mean <= 0))[owner]
    density = _kernels((owner, velocity, (1 - tail) * amount), width, grid)
    if tail > 0:
        density += _kernels((owner, velocity, tail * amount), TAIL_WIDTH * width, grid)
    hit = np.nonzero(density)[0]
    odds = ((1 - outliers) / outliers)[hit // len(grid)]
    gain = np.bincount(hit % len(grid), np.log1p(odds * density[hit]), len(grid))
    return gain + np.sum(np.log(outliers[used]))


def _kernels(pairs, width, grid):
    """Gaussians of unit area times an amount about each pair's velocity, summed per feature
    over the grid, flat; pairs: (owner, velocity, amount)."""
    owner, velocity, amount = pairs
    step = grid[1] - grid[0]
    height = amount / (width * np.sqrt(2 * np.pi))[owner]
    reach = np.ceil(REACH * width / step).astype(int)[owner]
    centre = np.rint((velocity - grid[0]) / step).astype(int)
    pair, index = _runs(centre - reach, 2 * reach + 1)
    inside = (index >= 0) & (index < len(grid))
    pair, index = pair[inside], index[inside]
    z = (grid[0] + index * step - velocity[pair]) / width[owner[pair]]
    kernel = height[pair] * np.exp(-0.5 * z * z)
    return np.bincount(owner[pair] * len(grid) + index, kernel, len(width) * len(grid))


def _runs(first, count):
    """(owner, index): for each row the indices first, first + 1, ... of which there are
    ``count``."""
    owner = np.repeat(np.arange(len(first)), count)
    start = np.cumsum(count) - count
    return owner, np.arange(len(owner)) - np.repeat(start - first, count)


def summarise(grid, score, width: float) -> Vote:
    """The Vote of a score curve; width: typical km/s error of one feature, which says how
    far from the best a rival must stand."""
    # The rival may also be 'no line of the list': its score is 0, with the trials of the search.
    best = int(np.argmax(score))
    exclusion = 6.0 * width + 2 * (grid[1] - grid[0])
    peaks = _peaks(score)
    far = peaks[np.abs(grid[peaks] - grid[best]) > exclusion]
    rivals = far[np.argsort(-score[far], kind="stable")][:5]
    outside = np.abs(grid - grid[best]) > exclusion
    rival_level = float(np.max(score[outside])) if np.any(outside) else -np.inf
    velocity, error = refined_peak(grid, score, best)
    return Vote(
        velocity,
        error,
        float(min(score[best] - rival_level, score[best] - np.log(len(grid)))),
        tuple((float(grid[i]), float(score[best] - score[i])) for i in rivals),
        grid,
        score,
        width,
    )


def _peaks(score):
    inner = (score[1:-1] >= score[:-2]) & (score[1:-1] > score[2:])
    return np.nonzero(np.concatenate(([True], inner, [True])))[0]


def refined_peak(grid, score, best) -> tuple[float, float]:
    """Parabola through the peak; its curvature is the statistical error."""
    if best in (0, len(grid) - 1):
        return float(grid[best]), float(grid[1] - grid[0])
    left, mid, right = score[best - 1 : best + 2]
    curvature = 2 * mid - left - right
    step = grid[1] - grid[0]
    if curvature <= 0:
        return float(grid[best]), float(step)
    shift = 0.5 * (right - left) / curvature
    return float(grid[best] + shift * step), float(step / np.sqrt(curvature))
