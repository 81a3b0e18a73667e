"""Curves the engine learns from the spectrum itself: how often a line of given predicted
strength shows, and how strong it then looks."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

BIN = 0.2  # dex
LOW, HIGH = -4.0, 6.0
CENTRES = np.arange(LOW + BIN / 2, HIGH, BIN)
FLOOR, CEILING = 1e-5, 0.96  # lists have errors even for the strongest lines
PRIOR_LINES = 0.4  # lines per bin that the usual form is worth before anything is seen
SLOPE = 1.5  # per dex, of the two-parameter form used when features are few


@dataclass(frozen=True, eq=False)
class DetectionCurve:
    """P(a line of predicted strength S makes a feature), at CENTRES, non-decreasing."""

    value: np.ndarray

    def __call__(self, strength):
        return np.interp(strength, CENTRES, self.value)


def threshold_form(ceiling: float, zero: float) -> DetectionCurve:
    """ceiling/(1 + 10^(-SLOPE (S - zero))), floored."""
    return DetectionCurve(np.clip(ceiling / (1 + 10 ** (-SLOPE * (CENTRES - zero))), FLOOR, CEILING))


def bin_of(strength):
    """Bin index of strengths (clipped to the ends)."""
    return np.clip(((np.asarray(strength) - LOW) / BIN).astype(int), 0, len(CENTRES) - 1)


def learn_detection(strength, seen, exposure, features: float) -> DetectionCurve:
    """Detection curve from per-line expectations.

    strength, seen, exposure: (n,) predicted strength, expected number of features made
    (0-1) and share of a line's chance to make one. Isotonic in bins above 300 features,
    the two-parameter form below (method: too few to learn a free curve).
    """
    index = bin_of(strength)
    hits = np.bincount(index, seen, len(CENTRES))
    tries = np.bincount(index, exposure, len(CENTRES))
    usual = threshold_form(0.9, 0.0).value
    form = _best_form(hits + PRIOR_LINES * usual, tries + PRIOR_LINES)
    if features < 300:
        return form
    from scipy.optimize import isotonic_regression

    prior = 3.0
    rate = (hits + prior * form.value) / (tries + prior)
    fitted = isotonic_regression(rate, weights=tries + prior).x
    return DetectionCurve(np.clip(fitted, FLOOR, CEILING))


@lru_cache(maxsize=1)
def _forms():
    """Every ceiling and zero point tried: (log p, log(1 - p), p), each (forms, bins)."""
    ceilings = (0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.35, 0.5, 0.65, 0.8, 0.9, 0.95)
    value = np.array(
        [threshold_form(c, z).value for c in ceilings for z in np.arange(-2.5, 2.51, 0.25)]
    )
    shown = np.log(value)
    return shown, np.log1p(-value), np.exp(shown)


def _best_form(hits, tries) -> DetectionCurve:
    """Mean of the forms weighed by their Bernoulli likelihood: a choice of one would jump
    from one step of ceiling or zero point to the next, and claims with it."""
    shown, missed, value = _forms()
    fit = shown @ hits + missed @ np.maximum(tries - hits, 0.0)
    weight = np.exp(fit - fit.max())
    return DetectionCurve(weight @ value / weight.sum())


@dataclass(frozen=True, eq=False)
class StrengthRelation:
    """Expected measured strength m of a line of predicted strength S, and its scatter (dex)."""

    value: np.ndarray
    scatter: float

    def __call__(self, strength):
        return np.interp(strength, CENTRES, self.value)

    def slope(self, strength):
        """dm/dS, floored at 0.1 so that strengths stay invertible."""
        step = 0.3
        rise = (self(np.asarray(strength) + step) - self(np.asarray(strength) - step)) / (2 * step)
        return np.maximum(rise, 0.1)


MIN_SCATTER = 0.12


def first_relation(measured, slope: float = 0.6) -> StrengthRelation:
    """A straight line through the median of the measured strengths, wide."""
    middle = float(np.nanmedian(measured)) if np.any(np.isfinite(measured)) else 0.0
    return StrengthRelation(middle + slope * (CENTRES - 0.7), 0.5)


def learn_relation(strength, measured, weight, previous: StrengthRelation) -> StrengthRelation:
    """Monotone relation and robust scatter from weighted pairs (p,)."""
    good = np.isfinite(measured) & np.isfinite(strength) & (weight > 0.05)
    if np.sum(weight[good]) < 12:
        return previous
    s, m, w = strength[good], measured[good], weight[good]
    index = bin_of(s)
    level, mass = np.array(previous.value), np.full(len(CENTRES), 1e-3)
    mass += np.bincount(index, w, len(CENTRES))
    used, middle = _medians_by(index, m, w)
    level[used] = middle
    from scipy.optimize import isotonic_regression

    known = mass > 0.5
    fitted = isotonic_regression(level[known], weights=mass[known]).x
    value = _extend(CENTRES[known], _smooth(fitted, mass[known]), previous)
    relation = StrengthRelation(value, previous.scatter)
    spread = 1.4826 * _weighted_median(np.abs(m - relation(s)), w)
    return StrengthRelation(value, max(float(spread), MIN_SCATTER))


def _smooth(level, mass):
    """Three-bin mass-weighted running mean: bins are narrower than the scatter."""
    padded_m = np.concatenate(([0.0], mass, [0.0]))
    padded = np.concatenate(([0.0], level * mass, [0.0]))
    total = padded[:-2] + 2 * padded[1:-1] + padded[2:]
    return total / (padded_m[:-2] + 2 * padded_m[1:-1] + padded_m[2:])


def _extend(centres, level, previous, slope: float = 0.4):
    """Beyond the learned range the relation goes on with a modest slope."""
    if len(centres) == 0:
        return previous.value
    value = np.interp(CENTRES, centres, level)
    value = np.where(CENTRES < centres[0], level[0] + slope * (CENTRES - centres[0]), value)
    return np.where(CENTRES > centres[-1], level[-1] + slope * (CENTRES - centres[-1]), value)


def _medians_by(index, values, weights):
    """(indices that occur, ascending; weighted median of the values of each)."""
    order = np.lexsort((values, index))
    index, values, total = index[order], values[order], np.cumsum(weights[order])
    start = np.nonzero(np.concatenate(([True], index[1:] != index[:-1])))[0]
    end = np.concatenate((start[1:], [len(index)])) - 1
    before = np.concatenate(([0.0], total))[start]
    place = np.searchsorted(total, before + 0.5 * (total[end] - before))
    return index[start], values[np.clip(place, start, end)]


def _weighted_median(values, weights) -> float:
    order = np.argsort(values, kind="stable")
    total = np.cumsum(weights[order])
    return float(values[order][np.searchsorted(total, 0.5 * total[-1])])
