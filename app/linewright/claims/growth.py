"""Excitation temperature by regression on the curve of growth.

For clean lines of several species, log gf = P3(m) + theta chi + c_species + c lambda, with m
the measured strength, chi the lower level's energy in eV and theta = 5039.778 K/T: lines of
one strength have one opacity (Gray 2005, The Observation and Analysis of Stellar Photospheres,
3rd ed., ch. 13 and 16). Both sides carry errors, and a fit that blames one of them bends theta:
with all errors on log gf simulated stars came out hot, with all on m cold. So residuals are
weighed by both (effective variance, Deming 1943, Statistical Adjustment of Data), the part of m
being what the stated errors of log gf leave over.
"""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

THETA_K = 5039.778  # K eV^-1 dex^-1: 1/(k ln 10), CODATA 2022
DEGREE = 3
LEAST_LINES, LEAST_OF_SPECIES = 25, 4
LEAST_SPAN = 1.0  # eV: four times the rms excitation about the species' means
TURNS, STEP, RESCALE = 24, 0.7, 4  # Gauss-Newton turns, damping, turns between scatters
CUT = 4.0  # sigma at which the biweight lets go of a line
SLOPES = (0.2, 4.0)  # dex of opacity per dex of m that a curve of growth can have
LARGEST, SMALLEST = 0.6, 0.01  # scatter of m, dex
CLUSTER = 0.1  # eV: lines from so near levels share their source's errors of strength
LEAST_THETA = 0.1


@dataclass(frozen=True, eq=False)
class CleanLines:
    """Lines named with confidence that dominate their features; arrays (n,).

    species: integer index; loggf, loggf_err: dex; e_low: eV; wave: Angstrom
    strength, strength_err: m = log10(d/(1-d)) of the central depth d, dex
    """

    species: np.ndarray
    loggf: np.ndarray
    loggf_err: np.ndarray
    e_low: np.ndarray
    wave: np.ndarray
    strength: np.ndarray
    strength_err: np.ndarray

    def __len__(self) -> int:
        return len(self.loggf)

    def take(self, which) -> "CleanLines":
        return CleanLines(*(getattr(self, f.name)[which] for f in fields(self)))


@dataclass(frozen=True, eq=False)
class GrowthFit:
    """theta, theta_err: dex per eV, the error of the regression alone; lines: used
    scatter: of m beyond the errors, dex; species: (k,) index of the species with an intercept
    intercept: (k,) dex, all at one m and wavelength
    covariance: (1 + k, 1 + k) of theta and the intercepts
    """

    theta: float
    theta_err: float
    lines: int
    scatter: float
    species: np.ndarray
    intercept: np.ndarray
    covariance: np.ndarray

    @property
    def temperature(self) -> float:
        """K"""
        return THETA_K / self.theta

    @property
    def error(self) -> float:
        """K, of the regression alone"""
        return THETA_K * self.theta_err / self.theta**2


def fit_growth(lines: CleanLines) -> GrowthFit | None:
    """The regression; None where lines, or their span of excitation, are too few for one."""
    lines = lines.take(_populous(lines.species))
    if len(lines) < LEAST_LINES or _span(lines) < LEAST_SPAN:
        return None
    model = _Model(lines)
    answer, keep = _solved(model)
    covariance = _clustered(model, answer, keep, _clusters(lines))
    if covariance is None or not answer.parameters[0] > LEAST_THETA:
        return None
    k = len(model.species)
    return GrowthFit(
        float(answer.parameters[0]),
        float(np.sqrt(covariance[0, 0])),
        int(np.sum(keep > 0)),
        answer.scatter,
        model.species,
        answer.parameters[1 : 1 + k],
        covariance[: 1 + k, : 1 + k],
    )


def _populous(species):
    """True for lines of species that have enough of them."""
    if len(species) == 0:
        return np.zeros(0, dtype=bool)
    return np.bincount(species)[species] >= LEAST_OF_SPECIES


def _span(lines: CleanLines) -> float:
    count = np.bincount(lines.species)
    mean = np.bincount(lines.species, lines.e_low) / np.maximum(count, 1)
    return float(4.0 * np.std(lines.e_low - mean[lines.species]))


@dataclass(frozen=True, eq=False)
class _Answer:
    parameters: np.ndarray
    scatter: float


class Regression:
    """target = design @ parameters, both sides with errors: those of log gf, and of m times the
    slope of the curve of growth."""

    def __init__(self, lines: CleanLines, target, design, first: int):
        """first: column of the first power of m; DEGREE of them follow one another."""
        self.lines, self.target, self.design = lines, target, design
        self.curve = slice(first, first + DEGREE)
        self.slope_of = np.arange(1, DEGREE + 1) * powers(lines)[:, :DEGREE]

    def residual(self, parameters):
        """(residual, slope of the curve of growth) of each line."""
        slope = np.clip(self.slope_of @ parameters[self.curve], *SLOPES)
        return self.target - self.design @ parameters, slope

    def variance(self, slope, scatter: float):
        noise = scatter**2 + self.lines.strength_err**2
        return self.lines.loggf_err**2 + slope**2 * noise

    def sensitivity(self, residual, slope, scatter: float):
        """(pull, its derivative by the parameters): slope and variance move together."""
        variance = self.variance(slope, scatter)
        root = np.sqrt(variance)
        by = -self.design / root[:, None]
        noise = scatter**2 + self.lines.strength_err**2
        by[:, self.curve] -= (residual * slope * noise / root**3)[:, None] * self.slope_of
        return residual / root, by


def powers(lines: CleanLines):
    """Powers 0 to DEGREE of m about its median, (n, 1 + DEGREE)."""
    m = lines.strength - np.median(lines.strength)
    return m[:, None] ** np.arange(DEGREE + 1)


def place(lines: CleanLines):
    """Wavelengths about their mean, in 1000 Angstrom."""
    return (lines.wave - np.mean(lines.wave)) / 1000.0


class _Model(Regression):
    """Design: chi, one intercept a species, powers of m, lambda."""

    def __init__(self, lines: CleanLines):
        self.species, which = np.unique(lines.species, return_inverse=True)
        own = (which[:, None] == np.arange(len(self.species))).astype(float)
        columns = [lines.e_low, own, powers(lines)[:, 1:], place(lines)]
        super().__init__(lines, lines.loggf, np.column_stack(columns), 1 + len(self.species))

    def first(self) -> np.ndarray:
        weight = 1.0 / self.lines.loggf_err
        return np.linalg.lstsq(
            self.design * weight[:, None], self.lines.loggf * weight, rcond=None
        )[0]


def _solved(model: _Model) -> tuple[_Answer, np.ndarray]:
    """Robust effective-variance solution and the biweights."""
    parameters, scatter = model.first(), 0.06
    keep = np.ones(len(model.lines))
    for turn in range(TURNS):
        residual, slope = model.residual(parameters)
        pull, by = model.sensitivity(residual, slope, scatter)
        keep = np.clip(1 - (pull / CUT) ** 2, 0.0, 1.0) ** 2
        # Thousands of lines against dozens of parameters: the normal equations take a tenth.
        kept = by * keep[:, None]
        step = np.linalg.lstsq(kept.T @ by, -(pull @ kept), rcond=None)[0]
        parameters = parameters + STEP * step
        if turn % RESCALE == RESCALE - 1:
            scatter = left_over(model, residual, slope)
    return _Answer(parameters, scatter), keep


def left_over(model: Regression, residual, slope) -> float:
    """Scatter of m at which the pulls have unit width (by bisection)."""
    low, high = 0.0, LARGEST
    for _ in range(20):
        middle = 0.5 * (low + high)
        pull = np.abs(residual) / np.sqrt(model.variance(slope, middle))
        low, high = (middle, high) if 1.4826 * np.median(pull) > 1 else (low, middle)
    return max(low, SMALLEST)


def _clusters(lines: CleanLines):
    key = np.round(lines.e_low / CLUSTER).astype(np.int64) + 1000 * lines.species.astype(np.int64)
    return np.unique(key, return_inverse=True)[1]


def _clustered(model: _Model, answer: _Answer, keep, cluster):
    """Covariance with lines of one cluster taken as fully dependent (Liang & Zeger 1986,
    Biometrika 73, 13); None where clusters are no more than parameters."""
    number, count = int(cluster.max()) + 1, model.design.shape[1]
    if number <= count:
        return None
    residual, slope = model.residual(answer.parameters)
    pull, by = model.sensitivity(residual, slope, answer.scatter)
    score = by * (keep * pull)[:, None]
    sums = np.stack([np.bincount(cluster, score[:, j], number) for j in range(count)], axis=1)
    bread = np.linalg.pinv(by.T @ (by * keep[:, None]))
    return number / (number - count) * bread @ (sums.T @ sums) @ bread
