"""Velocity by maximum-likelihood voting of features against predicted lines."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..spectra.medium import C_KM_S

DECLARE_MARGIN = 8.0  # log-likelihood over the best elsewhere; measured, see the study
CELLS = 50_000  # features x velocities scored at once: what a processor's cache holds
OUTLIER_SHARE = 0.25  # prior share of features the list does not explain


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


def vote(wave, sigma, line_wave, weight, velocity_range, outliers=OUTLIER_SHARE) -> Vote:
    """Score every velocity in ``velocity_range`` (km/s).

    wave, sigma: feature vacuum wavelengths and errors, Angstrom, (f,);
    line_wave: catalogue vacuum wavelengths, ascending, (n,); weight: (n,) prior of showing;
    outliers: prior share of features the list does not explain.
    """
    low, high = velocity_range
    width = np.maximum(C_KM_S * np.asarray(sigma) / np.asarray(wave), 0.05)
    step = float(np.clip(np.percentile(width, 20) / 2.0, 0.05, 20.0))
    grid = np.arange(low, high + step, step)
    score = np.zeros(len(grid))
    rows = max(1, CELLS // len(grid))
    for start in range(0, len(width), rows):
        some = slice(start, start + rows)
        features = (np.asarray(wave, dtype=float)[some], width[some])
        score += _summed(features, line_wave, weight, (grid, outliers))
    return summarise(grid, score, float(np.median(width)))


def _summed(features, line_wave, weight, setting):
    """Summed log-likelihood of some features (wave, width) over the grid.

    setting: (grid, prior share of outliers). A feature's density of line explanations counts
    relative to chance; a feature no line can reach says nothing.
    """
    (x, width), (grid, outliers) = features, setting
    first = np.searchsorted(line_wave, x / (1 + grid[-1] / C_KM_S))
    last = np.searchsorted(line_wave, x / (1 + grid[0] / C_KM_S))
    heaped = np.concatenate(([0.0], np.cumsum(weight)))
    mean = (heaped[last] - heaped[first]) / (grid[-1] - grid[0])
    used = mean > 0
    count = np.where(used, last - first, 0)
    owner, line = _runs(first, count)
    amount = weight[line] / (mean * width * np.sqrt(2 * np.pi) + (mean <= 0))[owner]
    velocity = C_KM_S * (x[owner] / line_wave[line] - 1.0)
    step = grid[1] - grid[0]
    reach = np.ceil(4 * width / step).astype(int)[owner]
    centre = np.rint((velocity - grid[0]) / step).astype(int)
    pair, index = _runs(centre - reach, 2 * reach + 1)
    inside = (index >= 0) & (index < len(grid))
    pair, index = pair[inside], index[inside]
    z = (grid[0] + index * step - velocity[pair]) / width[owner[pair]]
    kernel = amount[pair] * np.exp(-0.5 * z * z)
    density = np.bincount(owner[pair] * len(grid) + index, kernel, len(x) * len(grid))
    hit = np.nonzero(density)[0]
    gain = np.log1p((1 - outliers) / outliers * density[hit])
    return np.bincount(hit % len(grid), gain, len(grid)) + np.sum(used) * np.log(outliers)


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
