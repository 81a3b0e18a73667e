"""Claims that stand out from their like, and a wavelength scale that does not hold.

A claim is flagged where its velocity, its width, its strength or its excitation is unusual
among confident claims of its component or species; flags are for the reader and change no
probability.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..spectra.medium import C_KM_S
from .breakdown import Breakdown
from .features_in import usual_width

OFF_VELOCITY = 3.5  # sigma
BROAD, NARROW = 1.6, 0.6  # of the width usual at a feature's strength
DRIFT_SIGMA, DRIFT_LEAST = 5.0, 0.5  # significance, and km/s over the coverage
MIN_FOR_DRIFT = 40
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


def drift(solution, component: int) -> tuple[float, float]:
    """(slope, error) of velocity against wavelength, km/s per 1000 Angstrom, from confident
    pairs of a component; (nan, nan) where they are too few."""
    e, f = solution.problem.entries, solution.problem.features
    sure = (e.component[solution.entry] == component) & (solution.probability > 0.9)
    sure &= np.abs(solution.offset_sigma) < 3.0
    if np.sum(sure) < MIN_FOR_DRIFT:
        return float("nan"), float("nan")
    wave = f.wave[solution.feature[sure]]
    sigma = C_KM_S * solution.sigma[sure] / wave
    velocity = solution.offset_sigma[sure] * sigma
    x = (wave - np.mean(wave)) / 1000.0
    weight = 1.0 / sigma**2
    x = x - np.sum(weight * x) / np.sum(weight)
    power = np.sum(weight * x**2)
    slope = float(np.sum(weight * x * velocity) / power)
    residual = (velocity - np.sum(weight * velocity) / np.sum(weight) - slope * x) / sigma
    scatter = max(1.4826 * float(np.median(np.abs(residual))), 1.0)
    return slope, float(scatter / np.sqrt(power))


def drift_warning(solution, components) -> tuple[str, ...]:
    """A sentence where the star's (or nebula's) velocity drifts with wavelength."""
    coverage = solution.problem.coverage
    span = float(coverage[-1, 1] - coverage[0, 0]) / 1000.0
    for i, component in enumerate(components):
        slope, error = drift(solution, i)
        if abs(slope) > DRIFT_SIGMA * error and abs(slope) * span > DRIFT_LEAST:
            return (
                f"the {component.origin} velocity drifts by {slope:+.2f} +- {error:.2f} km/s per "
                "1000 Angstrom: check the wavelength solution and the medium",
            )
    return ()
