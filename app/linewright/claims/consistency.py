"""Claims that stand out from their like, and a wavelength scale that does not hold.

A claim is flagged where its velocity or its width is unusual among confident claims of the
same component; flags are for the reader and change no probability.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..spectra.medium import C_KM_S
from .features_in import usual_width

OFF_VELOCITY = 3.5  # sigma
BROAD, NARROW = 1.6, 0.6  # of the width usual at a feature's strength
DRIFT_SIGMA, DRIFT_LEAST = 5.0, 0.5  # significance, and km/s over the coverage
MIN_FOR_DRIFT = 40


def flagged(claims, solution):
    """The claims with 'off-velocity', 'broad' or 'narrow' added to the flags of named ones."""
    f = solution.problem.features
    usual = usual_width(f.wave, f.fwhm, f.strength, f.sign)
    ratio = np.nan_to_num(f.fwhm / usual, nan=1.0)
    return tuple(
        _flag(claim, float(ratio[i]), f.sign[i] > 0) if claim.probability >= 0.5 else claim
        for i, claim in enumerate(claims)
    )


def _flag(claim, ratio: float, absorbing: bool):
    words = claim.flags.split()
    if abs(claim.candidates[0].offset_sigma) > OFF_VELOCITY:
        words.append("off-velocity")
    if absorbing and ratio > BROAD and claim.species not in ("H I", "He I", "He II"):
        words.append("broad")
    elif absorbing and ratio < NARROW:
        words.append("narrow")
    return replace(claim, flags=" ".join(words)) if words else claim


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
