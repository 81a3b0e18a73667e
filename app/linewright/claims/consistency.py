"""Claims that stand out from their like.

A claim is flagged where its velocity, its width, its strength or its excitation is unusual
among confident claims of its component or species; flags are for the reader and change no
probability.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from .breakdown import Breakdown
from .features_in import usual_width

OFF_VELOCITY = 3.5  # sigma
BROAD, NARROW = 1.6, 0.6  # of the width usual at a feature's strength
OFF_STRENGTH = 3.5  # sigma of the strength relation
MIN_FOR_EXCITATION = 15  # firm claims of a species
DOUBTFUL = 1.5  # sigma of the strength relation: an odd excitation that fits this well is real
FENCE = 1.5  # interquartile ranges beyond the quartiles (Tukey 1977, Exploratory Data Analysis)


def flagged(claims, solution):
    """The claims with 'off-velocity', 'broad', 'narrow', 'off-strength' or 'off-excitation'
    added to the flags of named ones."""
    f = solution.problem.features
    usual = usual_width(f.wave, f.fwhm, f.strength, f.sign)
    ratio = np.nan_to_num(f.fwhm / usual, nan=1.0)
    fences = excitation_fences(claims)
    return tuple(
        _flag(claim, float(ratio[i]), f.sign[i] > 0, fences) if claim.probability >= 0.5 else claim
        for i, claim in enumerate(claims)
    )


def excitation_fences(claims) -> dict[tuple[str, str], tuple[float, float]]:
    """Per (species, origin) the lower-level energies (eV) beyond which a claim stands out."""
    found: dict[tuple[str, str], list[float]] = {}
    for claim in claims:
        if claim.standing == "firm" and np.isfinite(claim.candidates[0].e_low):
            key = (claim.species, claim.origin)
            found.setdefault(key, []).append(claim.candidates[0].e_low)
    fences = {}
    for key, energies in found.items():
        if len(energies) >= MIN_FOR_EXCITATION:
            low, high = np.percentile(energies, [25, 75])
            reach = FENCE * (high - low)
            fences[key] = (float(low - reach), float(high + reach))
    return fences


def _flag(claim, ratio: float, absorbing: bool, fences: dict):
    words = claim.flags.split()
    words += _line_words(claim.candidates[0], fences.get((claim.species, claim.origin)))
    if abs(claim.candidates[0].offset_sigma) > OFF_VELOCITY:
        words.append("off-velocity")
    if absorbing and ratio > BROAD and claim.species not in ("H I", "He I", "He II"):
        words.append("broad")
    elif absorbing and ratio < NARROW:
        words.append("narrow")
    return replace(claim, flags=" ".join(words)) if words else claim


def _line_words(line, fence) -> list[str]:
    words = []
    w = Breakdown(*line.weights) if line.weights else None
    misfit = abs(w.excess) / w.scatter if w is not None and w.scatter > 0 else np.inf
    if np.isfinite(misfit) and misfit > OFF_STRENGTH:
        words.append("off-strength")
    if fence is not None and not fence[0] <= line.e_low <= fence[1] and misfit > DOUBTFUL:
        words.append("off-excitation")
    return words
