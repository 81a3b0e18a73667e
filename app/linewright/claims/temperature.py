"""Excitation temperature from the profile of the mixture's likelihood.

It ranks predicted strengths; it is no effective temperature.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

# Rough photospheric electron pressures (log10 dyn cm-2) of dwarfs at the depth where weak
# lines form; common practice, no source. Ranking hardly depends on it.
_PE_T = np.array([3000.0, 4000.0, 5000.0, 6000.0, 8000.0, 10000.0, 15000.0, 20000.0, 30000.0])
_PE = np.array([-1.0, 0.0, 0.8, 1.3, 2.3, 2.7, 2.9, 3.1, 3.5])

USUAL, USUAL_WIDTH = 5000.0, 0.25
PRIOR_FEATURES = 50  # features at which the prior has lost half its weight
COARSE = (3800.0, 5000.0, 6500.0, 9000.0, 13000.0, 20000.0, 30000.0)
STEPS = (0.8, 0.88, 0.94, 1.06, 1.13, 1.22)  # of the first temperature
CLIMB, LONGEST_CLIMB = 0.07, 16  # step in ln T beyond an edge, and the most steps
COOLEST, HOTTEST = 3000.0, 45_000.0  # K
WIDEST = 0.15  # in ln T about the best: a parabola fits no farther
LEAST_CURVATURE = 25.0  # per unit of (ln T)^2: one sigma of 20 %
# Share of T by which the profile is off beyond its curvature: its worth on simulated stars
# of 4,000 to 15,000 K (tests/studies/temperature_study.py, seeds 1 and 2).
SYSTEMATIC = 0.05
DRAWS = 200  # of stretches with replacement, for how far the peak moves
SEED = 1


@dataclass(frozen=True, eq=False)
class Profile:
    """temperature, error: K (NaN error where the profile has no peak of its own)
    tried: (n,) K ascending; log_likelihood: (n,)
    sharpness: error in K by the curvature alone, whatever the stretches say
    """

    temperature: float
    error: float
    tried: np.ndarray
    log_likelihood: np.ndarray
    sharpness: float = float("nan")


def electron_pressure(temperature: float) -> float:
    """log10 of a dwarf's electron pressure (dyn cm-2) at an excitation temperature in K."""
    return float(np.interp(temperature, _PE_T, _PE))


def prior_log(temperature: float, features: int = 0) -> float:
    """Mild preference for the temperature where most stars under study stand: it decides
    only while features are few."""
    weight = PRIOR_FEATURES / (PRIOR_FEATURES + features)
    return -0.5 * weight * (np.log(temperature / USUAL) / USUAL_WIDTH) ** 2


def neighbours(temperature: float) -> tuple[float, ...]:
    """Temperatures to try around one of COARSE."""
    near = round_kelvin(temperature * np.array(STEPS))
    return tuple(t for t in near if COOLEST <= t <= HOTTEST)


def round_kelvin(temperature) -> np.ndarray:
    return np.round(np.asarray(temperature, dtype=float) / 50.0) * 50.0


def profile(value_at, start: float) -> Profile:
    """Profile of ``value_at`` about ``start``: the log-likelihood at a temperature in K, or its
    parts by stretches of the spectrum, (k,).

    While the best stands at an edge the search climbs on beyond it, so that a start wrong by
    thousands of kelvin ends at the same peak; it never leaves COOLEST to HOTTEST.
    """
    start = float(np.clip(start, COOLEST, HOTTEST))
    values: dict[float, float] = {}
    parts: dict[float, np.ndarray] = {}

    def look(temperatures) -> None:
        for t in temperatures:
            if t not in parts:
                parts[t] = np.atleast_1d(np.asarray(value_at(t), dtype=float))
                values[t] = float(np.sum(parts[t]))

    look((start, *neighbours(start)))
    if _climbed(values, look) or len(values) <= len(STEPS):
        best = max(values, key=values.get)
        if COOLEST < best < HOTTEST:
            look(neighbours(best))
            _climbed(values, look)
    tried = np.array(sorted(values))
    found = np.array([values[t] for t in tried])
    temperature, error = peak_of(tried, found, np.array([parts[t] for t in tried]))
    return Profile(temperature, error, tried, found, peak_of(tried, found)[1])


def _climbed(values: dict[float, float], look) -> bool:
    """Whether the best stood at an edge; looks on beyond it while it does."""
    for step in range(LONGEST_CLIMB):
        best, edges = max(values, key=values.get), (min(values), max(values))
        if best not in edges:
            return step > 0
        further = best * np.exp(CLIMB if best == edges[1] else -CLIMB)
        further = float(np.clip(round_kelvin(further), COOLEST, HOTTEST))
        if further in values:
            return step > 0
        look((further,))
    return True


def peak_of(tried, log_likelihood, parts=None) -> tuple[float, float]:
    """(T, error) in K of a profile: its peak's, widened by SYSTEMATIC and by how far the peak
    moves when the stretches of the spectrum are drawn again with replacement (Efron 1979,
    Annals of Statistics 7, 1).

    parts: (tried, k) of the log-likelihood by stretches. Where two peaks are nearly alike, and
    noise chooses one, the draws reach the other. NaN error where the largest value stands at an
    end of those tried.
    """
    best, error = _peak(np.asarray(tried, dtype=float), np.asarray(log_likelihood, dtype=float))
    if not np.isfinite(error):
        return best, error
    moved = 0.0
    if parts is not None and parts.shape[1] > 1:
        drawn = np.log(_drawn_peaks(np.asarray(tried, dtype=float), parts) / best)
        moved = float(np.sqrt(np.mean(drawn**2)))
    return best, best * float(np.hypot(max(error, moved), SYSTEMATIC))


def _drawn_peaks(tried, parts):
    """Peaks (DRAWS,) in K of profiles made of as many stretches, drawn with replacement."""
    count = parts.shape[1]
    weight = np.random.default_rng(SEED).multinomial(count, np.full(count, 1 / count), DRAWS)
    return np.array([_peak(tried, values)[0] for values in weight @ parts.T])


def _peak(tried, y) -> tuple[float, float]:
    """(T in K, its relative error by the curvature): a parabola in ln T through the values
    near the largest.

    The values scatter by a few units, since each comes from an engine of its own, so all
    within WIDEST (and five at least) share in the parabola.
    """
    t = np.log(tried)
    k = int(np.argmax(y))
    if k in (0, len(y) - 1):
        return float(tried[k]), float("nan")
    order = np.argsort(np.abs(t - t[k]), kind="stable")
    near = order[: max(int(np.sum(np.abs(t - t[k]) <= WIDEST)), min(5, len(y)))]
    low, high = t[max(k - 2, 0)], t[min(k + 2, len(y) - 1)]
    a, b, _ = np.polyfit(t[near] - t[k], y[near], 2)
    if a >= -0.5 * LEAST_CURVATURE:
        return float(np.exp(t[k])), 1 / np.sqrt(LEAST_CURVATURE)
    best = float(np.exp(np.clip(t[k] - b / (2 * a), low, high)))
    return best, 1.0 / np.sqrt(-2 * a)
