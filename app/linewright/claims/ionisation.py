"""A hint at the electron pressure from neighbouring stages of ionisation.

Where lines of two stages of one element stand on one curve of growth, the difference of their
intercepts is log10 of the ratio of their numbers less that of their partition functions, and
the Saha equation gives the electron pressure for a temperature. LTE and one layer are assumed:
neutral iron is over-ionised in metal-poor and hot stars, which looks like a lower pressure.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..lines.levels import ionisation_energy, saha_ratio_log
from ..lines.species import parse_species
from .growth import THETA_K, GrowthFit

ELEMENT_SCATTER = 0.15  # dex: errors of log gf scales and of LTE, element by element
STEP_K = 20.0  # of the numerical derivative
LARGEST_ERROR = 1.0  # dex: a hint worse than this is none


@dataclass(frozen=True)
class Balance:
    """log_pe: log10 of the electron pressure in dyn cm-2, and its error with that of T
    per_100k: its change, dex, when T rises by 100 K; pairs: such as ('Fe I/II', 'Ti I/II')
    """

    log_pe: float
    error: float
    per_100k: float
    pairs: tuple[str, ...]


def pressure_from_balance(difference, energy_ev, temperature: float):
    """log10 electron pressure, dyn cm-2, by Saha.

    difference: log10 [n(upper)/n(lower)] - log10 [U(upper)/U(lower)]; energy_ev: to ionise
    the lower stage; temperature in K.
    """
    return saha_ratio_log(0.0, energy_ev, temperature, 0.0) - difference


def ionisation_balance(fit: GrowthFit, names, temperature, error) -> Balance | None:
    """The balance of all pairs of neighbouring stages in a curve of growth; None without any.

    names: species names by catalogue index; temperature, error: K, adopted.
    """
    pairs = _pairs([parse_species(names[i]) for i in fit.species])
    if not pairs or not np.isfinite(temperature) or not np.isfinite(error):
        return None
    low, high = (np.array(x) for x in zip(*pairs))
    energy = np.array([ionisation_energy(names[fit.species[i]]) for i in low])
    usable = np.isfinite(energy)
    if not np.any(usable):
        return None
    low, high, energy = low[usable], high[usable], energy[usable]
    variance = _conditional(fit, low, high) + ELEMENT_SCATTER**2

    def mean(t):
        value = pressure_from_balance(_difference(fit, low, high, t), energy, t)
        return float(np.sum(value / variance) / np.sum(1.0 / variance)), value

    best, each = mean(temperature)
    slope = (mean(temperature + STEP_K)[0] - mean(temperature - STEP_K)[0]) / (2 * STEP_K)
    spread = max(float(np.sum((each - best) ** 2 / variance)) / max(len(each) - 1, 1), 1.0)
    own = np.sqrt(spread / np.sum(1.0 / variance))
    total = float(np.hypot(own, slope * error))
    if not total < LARGEST_ERROR:
        return None
    labels = tuple(_label(names[fit.species[i]], names[fit.species[j]]) for i, j in zip(low, high))
    return Balance(best, total, 100.0 * slope, labels)


def _pairs(species) -> list[tuple[int, int]]:
    """Positions of the neighbouring stages of one element."""
    place = {(s.element, s.stage): i for i, s in enumerate(species) if s.is_atomic}
    return [(i, place[e, z + 1]) for (e, z), i in sorted(place.items()) if (e, z + 1) in place]


def _label(low: str, high: str) -> str:
    return f"{low}/{high.split()[1]}"


def _difference(fit: GrowthFit, low, high, temperature):
    """c(lower) - c(upper stage) at a temperature (K): intercepts move with theta as their
    covariance says."""
    shift = THETA_K / temperature - fit.theta
    moved = fit.intercept + fit.covariance[1:, 0] / fit.covariance[0, 0] * shift
    return moved[low] - moved[high]


def _conditional(fit: GrowthFit, low, high):
    """Variance of those differences at a given theta."""
    c = fit.covariance
    inner = c[1:, 1:] - np.outer(c[1:, 0], c[0, 1:]) / c[0, 0]
    return np.maximum(inner[low, low] + inner[high, high] - 2 * inner[low, high], 0.0)
