"""A wavelength scale that does not hold: the velocity of confident claims runs or jumps along
the spectrum.

The straight line is a weighted fit; a jump is the stretch (a segment, or neighbouring pieces of
equal number of lines) whose mean stands out most from the rest. Both are judged by the scatter
of the offsets themselves, and the jump by how many stretches were tried (Bonferroni).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..spectra.medium import C_KM_S

SURE, NEAR = 0.9, 8.0  # P of the pairs that count; sigma
CLIP, ROUNDS = 3.0, 4  # scatters about the line; times it is fitted
LEAST_SCATTER = 0.3  # of the stated errors, which hold what the lists may be off
FAR = 6.0  # scatters from the median: of no account in a jump
DRIFT_SIGMA, DRIFT_LEAST = 5.0, 0.25  # significance, and km/s over the coverage
MIN_FOR_DRIFT = 40
JUMP_SIGMA, JUMP_LEAST = 6.0, 0.2  # significance, and km/s
PIECE, MOST_PIECES, FEWEST = 12, 24, 8  # lines a piece; pieces; lines of a stretch


@dataclass(frozen=True, eq=False)
class Offsets:
    """Confident pairs of one component, by wavelength: vacuum Angstrom, km/s off the
    component, error, segment."""

    wave: np.ndarray
    velocity: np.ndarray
    sigma: np.ndarray
    segment: np.ndarray

    def __len__(self) -> int:
        return len(self.wave)


@dataclass(frozen=True)
class Jump:
    """A stretch (vacuum Angstrom) whose lines stand ``size`` +- ``error`` km/s off the rest;
    sigmas: their ratio, 0 where nothing could be tried."""

    low: float
    high: float
    size: float
    error: float

    @property
    def sigmas(self) -> float:
        return abs(self.size) / self.error if self.error > 0 else 0.0


NO_JUMP = Jump(float("nan"), float("nan"), 0.0, 0.0)


def offsets_of(solution, component: int) -> Offsets:
    """The confident pairs of a component."""
    e, f = solution.problem.entries, solution.problem.features
    sure = (e.component[solution.entry] == component) & (solution.probability > SURE)
    sure &= np.abs(solution.offset_sigma) < NEAR
    rows = solution.feature[sure]
    order = np.argsort(f.wave[rows], kind="stable")
    wave = f.wave[rows][order]
    sigma = C_KM_S * solution.sigma[sure][order] / wave
    return Offsets(wave, solution.offset_sigma[sure][order] * sigma, sigma, f.segment[rows][order])


def drift(found: Offsets) -> tuple[float, float]:
    """(slope, error) of velocity against wavelength, km/s per 1000 Angstrom; (nan, nan) where
    the pairs are too few."""
    if len(found) < MIN_FOR_DRIFT:
        return float("nan"), float("nan")
    x, velocity, sigma = (found.wave - np.mean(found.wave)) / 1000.0, found.velocity, found.sigma
    good = np.ones(len(found), dtype=bool)
    for _ in range(ROUNDS):
        weight = good / sigma**2
        middle, level = (np.sum(weight * y) / np.sum(weight) for y in (x, velocity))
        power = np.sum(weight * (x - middle) ** 2)
        slope = float(np.sum(weight * (x - middle) * velocity) / power)
        residual = np.abs(velocity - level - slope * (x - middle)) / sigma
        scatter = max(1.4826 * float(np.median(residual)), LEAST_SCATTER)
        good = residual < CLIP * scatter
    return slope, float(scatter / np.sqrt(power))


def jump(found: Offsets) -> Jump:
    """The stretch that stands out most from the rest."""
    if len(found) < MIN_FOR_DRIFT:
        return NO_JUMP
    away = np.abs(found.velocity - np.median(found.velocity)) / found.sigma
    scatter = max(1.4826 * float(np.median(away)), LEAST_SCATTER)
    weight = (away < FAR * scatter) / found.sigma**2
    heap = np.concatenate(([0.0], np.cumsum(weight)))
    moment = np.concatenate(([0.0], np.cumsum(weight * found.velocity)))
    best = NO_JUMP
    for a, b in _stretches(found):
        inner, outer = heap[b] - heap[a], heap[-1] - heap[b] + heap[a]
        if not (inner > 0 and outer > 0):
            continue
        part = moment[b] - moment[a]
        size = part / inner - (moment[-1] - part) / outer
        error = scatter * np.sqrt(1.0 / inner + 1.0 / outer)
        one = Jump(float(found.wave[a]), float(found.wave[b - 1]), float(size), float(error))
        if one.sigmas > best.sigmas:
            best = one
    return best


def _stretches(found: Offsets) -> list[tuple[int, int]]:
    """(first, past the last) row of each stretch tried: runs of pieces up to half of all lines,
    and segments, each with at least FEWEST lines."""
    count = len(found)
    pieces = int(np.clip(count // PIECE, 2, MOST_PIECES))
    edges = np.rint(np.linspace(0, count, pieces + 1)).astype(int).tolist()
    tried = {(a, b) for i, a in enumerate(edges) for b in edges[i + 1 :]}
    turns = np.nonzero(np.diff(found.segment))[0] + 1
    tried |= set(zip([0, *turns.tolist()], [*turns.tolist(), count]))
    return sorted(t for t in tried if FEWEST <= t[1] - t[0] <= count // 2)


def drift_warning(solution, components) -> tuple[str, ...]:
    """Sentences where the star's (or nebula's) velocity drifts with wavelength, or jumps."""
    coverage = solution.problem.coverage
    span = float(coverage[-1, 1] - coverage[0, 0]) / 1000.0
    for i, component in enumerate(components):
        found = offsets_of(solution, i)
        words = _said(component.origin, found, span)
        if words:
            return words
    return ()


def _said(origin: str, found: Offsets, span: float) -> tuple[str, ...]:
    slope, error = drift(found)
    runs = abs(slope) > DRIFT_SIGMA * error and abs(slope) * span > DRIFT_LEAST
    if runs:
        return (
            f"the {origin} velocity drifts by {slope:+.2f} +- {error:.2f} km/s per "
            "1000 Angstrom: check the wavelength solution and the medium",
        )
    step = jump(found)
    if step.sigmas > JUMP_SIGMA and abs(step.size) > JUMP_LEAST:
        return (
            f"the {origin} velocity drifts: between {step.low:.0f} and {step.high:.0f} Angstrom "
            f"(vacuum) lines stand {step.size:+.2f} +- {step.error:.2f} km/s off the rest: check "
            "the wavelength solution there",
        )
    return ()
