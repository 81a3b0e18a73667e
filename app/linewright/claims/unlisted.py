"""The null: features no catalogue line makes, their density and their strengths."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

PRIOR_SHARE = 0.08  # unlisted share of features before anything is learned
PRIOR_WEIGHT = 6.0  # features that prior is worth
WIDER_NULL = 8.0  # factor on that prior when absence is no evidence (see the study)
STRENGTH_BINS = np.arange(-6.0, 10.01, 0.25)


@dataclass(frozen=True, eq=False)
class Null:
    """density: unlisted features per Angstrom by sign index (0 absorption, 1 emission);
    strengths: probability density over STRENGTH_BINS, by sign index."""

    density: np.ndarray
    strengths: np.ndarray

    def at(self, sign, strength):
        """(density, density of the measured strength; 1 where it is unknown)."""
        which = (np.asarray(sign) < 0).astype(int)
        known = np.isfinite(strength)
        index = np.digitize(np.where(known, strength, 0.0), STRENGTH_BINS) - 1
        index = np.clip(index, 0, self.strengths.shape[1] - 1)
        return self.density[which], np.where(known, self.strengths[which, index], 1.0)


def learn_null(features, unlisted, length: float, complete: bool) -> Null:
    """Density and strengths of the unlisted from P(unlisted) per feature.

    length: searched Angstrom.
    """
    density, strengths = np.zeros(2), np.zeros((2, len(STRENGTH_BINS) - 1))
    for which, sign in enumerate((1, -1)):
        here = features.sign == sign
        share = PRIOR_SHARE * (1.0 if complete else WIDER_NULL)
        weight = PRIOR_WEIGHT if complete else max(PRIOR_WEIGHT, 0.5 * float(np.sum(here)))
        count = np.sum(unlisted[here])
        total = max(float(np.sum(here)), 1.0)
        rate = (count + weight * share) / (total + weight)
        density[which] = rate * total / max(length, 1.0)
        strengths[which] = _strength_density(features.strength[here], unlisted[here])
    return Null(density, strengths)


def _strength_density(strength, unlisted):
    """Smoothed histogram of the unlisted, leaning on all features while those are few."""
    known = np.isfinite(strength)
    step = STRENGTH_BINS[1] - STRENGTH_BINS[0]
    flat = np.full(len(STRENGTH_BINS) - 1, 0.02)
    if not np.any(known):
        return flat / (np.sum(flat) * step)
    everything = np.histogram(strength[known], STRENGTH_BINS)[0].astype(float)
    everything *= 10.0 / np.sum(everything)
    chosen = np.histogram(strength[known], STRENGTH_BINS, weights=unlisted[known])[0]
    mass = np.convolve(chosen + everything, [0.25, 0.5, 0.25], mode="same") + flat
    return mass / (np.sum(mass) * step)
