"""The null: features no catalogue line makes, their density and their strengths."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

PRIOR_SHARE = 0.08  # unlisted share of features before anything is learned
PRIOR_WEIGHT = 6.0  # features that prior is worth
WIDER_NULL = 8.0  # factor on that prior when absence is no evidence (see the study)
STRENGTH_BINS = np.arange(-6.0, 10.01, 0.25)


class StrengthBins:
    """Where the measured strengths of features (f,) fall in STRENGTH_BINS.

    sign: +1 absorption, -1 emission; strength: dex, NaN unknown.
    """

    def __init__(self, sign, strength):
        self.which = (np.asarray(sign) < 0).astype(int)
        self.known = np.isfinite(strength)
        place = np.digitize(np.where(self.known, strength, 0.0), STRENGTH_BINS) - 1
        self.index = np.clip(place, 0, len(STRENGTH_BINS) - 2)
        self.rows = [np.nonzero(self.which == w)[0] for w in (0, 1)]

    def histogram(self, which: int, weight=None):
        """Summed weight (f,) of the known strengths of one sign index, per bin."""
        rows = self.rows[which]
        rows = rows[self.known[rows]]
        weight = None if weight is None else weight[rows]
        return np.bincount(self.index[rows], weight, len(STRENGTH_BINS) - 1).astype(float)


@dataclass(frozen=True, eq=False)
class Null:
    """density: unlisted features per Angstrom by sign index (0 absorption, 1 emission);
    strengths: probability density over STRENGTH_BINS, by sign index."""

    density: np.ndarray
    strengths: np.ndarray

    def at(self, bins: StrengthBins):
        """(density, density of the measured strength; 1 where it is unknown)."""
        chosen = self.strengths[bins.which, bins.index]
        return self.density[bins.which], np.where(bins.known, chosen, 1.0)


def learn_null(bins: StrengthBins, unlisted, length: float, complete: bool) -> Null:
    """Density and strengths of the unlisted from P(unlisted) per feature.

    length: searched Angstrom.
    """
    density, strengths = np.zeros(2), np.zeros((2, len(STRENGTH_BINS) - 1))
    for which in (0, 1):
        rows = bins.rows[which]
        share = PRIOR_SHARE * (1.0 if complete else WIDER_NULL)
        weight = PRIOR_WEIGHT if complete else max(PRIOR_WEIGHT, 0.5 * len(rows))
        total = max(float(len(rows)), 1.0)
        rate = (np.sum(unlisted[rows]) + weight * share) / (total + weight)
        density[which] = rate * total / max(length, 1.0)
        strengths[which] = _strength_density(bins.histogram(which), bins.histogram(which, unlisted))
    return Null(density, strengths)


def _strength_density(everything, chosen):
    """Smoothed histogram of the unlisted, leaning on all features while those are few."""
    step = STRENGTH_BINS[1] - STRENGTH_BINS[0]
    flat = np.full(len(STRENGTH_BINS) - 1, 0.02)
    if not np.any(everything):
        return flat / (np.sum(flat) * step)
    leaning = everything * (10.0 / np.sum(everything))
    mass = np.convolve(chosen + leaning, [0.25, 0.5, 0.25], mode="same") + flat
    return mass / (np.sum(mass) * step)
