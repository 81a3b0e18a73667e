"""Velocity by maximum-likelihood voting of features against predicted lines."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..spectra.medium import C_KM_S

DECLARE_MARGIN = 8.0  # log-likelihood over the best elsewhere; measured, see the study
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
    for x, w in zip(np.asarray(wave, float), width, strict=True):
        density = _feature_density(x, w, line_wave, weight, grid)
        score += np.log(outliers + (1 - outliers) * density)
    return summarise(grid, score, float(np.median(width)))


def _feature_density(x, width, line_wave, weight, grid):
    """Density of line explanations of one feature over the grid, relative to chance."""
    first, last = np.searchsorted(
        line_wave, [x / (1 + grid[-1] / C_KM_S), x / (1 + grid[0] / C_KM_S)]
    )
    density = np.zeros(len(grid))
    velocities = C_KM_S * (x / line_wave[first:last] - 1.0)
    step = grid[1] - grid[0]
    reach = int(np.ceil(4 * width / step))
    offsets = np.arange(-reach, reach + 1)
    centre = np.rint((velocities - grid[0]) / step).astype(int)
    index = centre[:, None] + offsets
    kernel = np.exp(-0.5 * ((grid[0] + index * step - velocities[:, None]) / width) ** 2)
    kernel *= weight[first:last, None] / (width * np.sqrt(2 * np.pi))
    inside = (index >= 0) & (index < len(grid))
    np.add.at(density, index[inside], kernel[inside])
    mean = float(np.sum(weight[first:last])) / (grid[-1] - grid[0])
    if mean <= 0:
        return np.ones(len(grid))
    return density / mean


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
