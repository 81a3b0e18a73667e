"""Predicted lines of every velocity component, flattened for the mixture engine."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

ABSORPTION, EMISSION = 1, -1
MIN_RESOLUTION = 0.04  # Angstrom; lines closer than this are one feature in any spectrum
RESOLUTION_SHARE = 0.45  # of the FWHM: lines closer than this are one feature
SHARE_EXPONENT = 1.1  # softens predicted opacities, whose log scatter is 0.2 to 0.3 dex


@dataclass(frozen=True, eq=False)
class Entries:
    """Predicted lines in the spectrum's frame, sorted by ``wave``; arrays of length n.

    wave: vacuum Angstrom where the line is expected; error: its one sigma, Angstrom
    strength: log10 predicted strength, each population on a zero point of its own
    population: index of the strength model (see populations.py)
    sign: +1 absorption, -1 emission
    species: index of the (population, species) pair for strength offsets
    component: index of the velocity component; row: catalogue row
    segment: of the spectrum; a line in overlapping segments has an entry in each
    """

    wave: np.ndarray
    error: np.ndarray
    strength: np.ndarray
    population: np.ndarray
    sign: np.ndarray
    species: np.ndarray
    component: np.ndarray
    row: np.ndarray
    segment: np.ndarray

    def __len__(self) -> int:
        return len(self.wave)

    def take(self, which) -> "Entries":
        return Entries(**{f.name: getattr(self, f.name)[which] for f in fields(self)})


def join(parts: list[Entries]) -> Entries:
    """One table out of several, sorted by wavelength (stable, so deterministic)."""
    columns = {f.name: np.concatenate([getattr(p, f.name) for p in parts]) for f in fields(Entries)}
    order = np.argsort(columns["wave"], kind="stable")
    return Entries(**{name: column[order] for name, column in columns.items()})


@dataclass(frozen=True, eq=False)
class Groups:
    """What stands within one resolution element of each entry (same population).

    share: of the softened predicted strength, 0-1
    total: log10 of the summed strength; centroid: strength-weighted wavelength, Angstrom
    """

    share: np.ndarray
    total: np.ndarray
    centroid: np.ndarray


def group_half_width(fwhm):
    """Half width (Angstrom) within which lines make one feature, from the FWHM."""
    return np.maximum(MIN_RESOLUTION, RESOLUTION_SHARE * np.asarray(fwhm, dtype=float))


def group(wave, strength, population, half_width) -> Groups:
    """Shares, totals and centroids of lines closer than ``half_width`` (Angstrom, per entry).

    All arrays of shape (n,), ``wave`` ascending. Only lines of one population share: the
    strengths of different ones stand on different scales, and they compete as rivals.
    """
    n = len(wave)
    share, total, centroid = np.ones(n), np.array(strength, dtype=float), np.array(wave, float)
    for kind in np.unique(population):
        rows = np.nonzero(population == kind)[0]
        w, top = wave[rows], float(np.max(strength[rows]))
        linear = 10.0 ** (strength[rows] - top)
        soft = linear**SHARE_EXPONENT
        first = np.searchsorted(w, w - half_width[rows], side="left")
        last = np.searchsorted(w, w + half_width[rows], side="right")
        reference = w[0]
        sums = [
            np.concatenate(([0.0], np.cumsum(x)))
            for x in (soft, linear, linear * (w - reference))
        ]
        soft_sum, lin_sum, moment = (x[last] - x[first] for x in sums)
        share[rows] = np.clip(soft / np.maximum(soft_sum, soft), 0.0, 1.0)
        lin_sum = np.maximum(lin_sum, linear)
        total[rows] = top + np.log10(lin_sum)
        centre = reference + moment / lin_sum
        alone = (last - first) == 1
        centroid[rows] = np.where(
            alone, w, np.clip(centre, w - half_width[rows], w + half_width[rows])
        )
    return Groups(share, total, centroid)
