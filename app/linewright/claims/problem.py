"""The mixture engine's input: measured features, predicted lines, what was searched."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .entries import Entries

NOT_SAID, SET_ASIDE = -1, -2


@dataclass(frozen=True, eq=False)
class FeatureData:
    """Features as the engine sees them; arrays (f,), in the spectrum's frame.

    wave, error: vacuum Angstrom and centroid error; fwhm: Angstrom (NaN unknown);
    sign: +1 absorption, -1 emission; strength: measured strength m, dex (NaN unknown):
    log10(d/(1-d)) of the central depth in absorption, log10 of line flux in emission;
    strength_err: dex; excess: position error (Angstrom) of features broader than others of
    their strength, which are unresolved blends; segment: index, all 0 unless segments overlap;
    crowded: True where a neighbour stands so near that it disturbs the centroid
    """

    wave: np.ndarray
    error: np.ndarray
    fwhm: np.ndarray
    sign: np.ndarray
    strength: np.ndarray
    strength_err: np.ndarray
    excess: np.ndarray
    segment: np.ndarray
    crowded: np.ndarray

    def __len__(self) -> int:
        return len(self.wave)


@dataclass(frozen=True, eq=False)
class Problem:
    """One identification problem.

    coverage: (k, 2) searched vacuum ranges in the spectrum's frame; complete: whether
    every detectable feature inside it is in the list (else absence is no evidence)
    group_half_width: lines closer than this make one feature, Angstrom, per entry
    populations: number of strength populations; species: number of species indices
    ungraded: populations whose depths are not predicted
    said: per feature the species name index a person gave, NOT_SAID, or SET_ASIDE
    crowd: per feature the local density of unlisted features over the mean one; None: even
    strength_err: per entry the error of its predicted strength beyond the usual scatter, dex
    loggf_err: per entry the error of log gf, dex
    """

    features: FeatureData
    entries: Entries
    coverage: np.ndarray
    complete: bool
    group_half_width: np.ndarray
    populations: int
    species: int
    ungraded: tuple[int, ...] = ()
    said: np.ndarray | None = None
    crowd: np.ndarray | None = None
    strength_err: np.ndarray | None = None
    loggf_err: np.ndarray | None = None

    def length(self) -> float:
        return float(np.sum(self.coverage[:, 1] - self.coverage[:, 0]))


def inside(wave, coverage):
    """True where ``wave`` lies in one of the (k, 2) ascending ranges."""
    index = np.searchsorted(coverage[:, 0], wave, side="right") - 1
    safe = np.maximum(index, 0)
    return (index >= 0) & (wave <= coverage[safe, 1])


def find_pairs(features: FeatureData, entries: Entries, reach):
    """Pairs (feature, entry) of equal sign closer than ``reach`` (Angstrom, per feature)."""
    first = np.searchsorted(entries.wave, features.wave - reach, side="left")
    last = np.searchsorted(entries.wave, features.wave + reach, side="right")
    count = last - first
    feature = np.repeat(np.arange(len(features)), count)
    start = np.repeat(first - np.concatenate(([0], np.cumsum(count)[:-1])), count)
    entry = start + np.arange(len(feature))
    same = features.sign[feature] == entries.sign[entry]
    same &= features.segment[feature] == entries.segment[entry]
    return feature[same], entry[same]
