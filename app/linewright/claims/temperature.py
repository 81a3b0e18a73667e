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


@dataclass(frozen=True, eq=False)
class Profile:
    """temperature, error: K (NaN error where the profile has no peak of its own)
    tried: (n,) K ascending; log_likelihood: (n,)
    """

    temperature: float
    error: float
    tried: np.ndarray
    log_likelihood: np.ndarray


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
    """Profile of ``value_at`` (log-likelihood at a temperature in K) about ``start``.

    While the best stands at an edge the search climbs on beyond it, so that a start wrong by
    thousands of kelvin ends at the same peak; it never leaves COOLEST to HOTTEST.
    """
    start = float(np.clip(start, COOLEST, HOTTEST))
    values: dict[float, float] = {}

    def look(temperatures) -> None:
        for t in temperatures:
            if t not in values:
                values[t] = float(value_at(t))

    look((start, *neighbours(start)))
    if _climbed(values, look) or len(values) <= len(STEPS):
        best = max(values, key=values.get)
        if COOLEST < best < HOTTEST:
            look(neighbours(best))
            _climbed(values, look)
    tried = np.array(sorted(values))
    found = np.array([values[t] for t in tried])
    temperature, error = peak_of(tried, found)
    return Profile(temperature, error, tried, found)


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


def peak_of(tried, log_likelihood) -> tuple[float, float]:
    """(T, error) in K of a profile: a parabola in ln T through the values near the largest.

    The values scatter by a few units, since each comes from an engine of its own, so all
    within WIDEST (and five at least) share in the parabola. The error is its curvature's,
    widened by SYSTEMATIC; NaN where the largest value stands at an end.
    """
    tried, y = np.asarray(tried, dtype=float), np.asarray(log_likelihood, dtype=float)
    t = np.log(tried)
    k = int(np.argmax(y))
    if k in (0, len(y) - 1):
        return float(tried[k]), float("nan")
    order = np.argsort(np.abs(t - t[k]), kind="stable")
    near = order[: max(int(np.sum(np.abs(t - t[k]) <= WIDEST)), min(5, len(y)))]
    low, high = t[max(k - 2, 0)], t[min(k + 2, len(y) - 1)]
    a, b, _ = np.polyfit(t[near] - t[k], y[near], 2)
    if a >= -0.5 * LEAST_CURVATURE:
        return float(np.exp(t[k])), float(np.exp(t[k]) / np.sqrt(LEAST_CURVATURE))
    best = float(np.exp(np.clip(t[k] - b / (2 * a), low, high)))
    return best, best * float(np.hypot(1.0 / np.sqrt(-2 * a), SYSTEMATIC))
