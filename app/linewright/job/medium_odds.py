"""Odds of reading wavelengths as air or as vacuum, from the lines themselves.

The two readings differ by 82-85 km/s over the optical, nearly a velocity: only how that
difference changes with wavelength decides, and a tilt of the calibration can imitate it.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..claims.temperature import COARSE, electron_pressure
from ..claims.velocity import emission_vote, stellar_vote
from ..lines.strengths import absorption_strength
from ..spectra.medium import air_to_vacuum

SOFTENING = 3.0  # log-likelihoods are divided by this: votes are not independent
SPREAD = 100.0  # km/s added to the search, since the readings differ by 85


@dataclass(frozen=True)
class MediumOdds:
    """air, vacuum: probabilities; velocities in km/s under each reading."""

    air: float
    vacuum: float
    velocity_air: float
    velocity_vacuum: float

    def in_words(self) -> str:
        return (
            f"air {self.air:.2f} at {self.velocity_air:+.1f} km/s, "
            f"vacuum {self.vacuum:.2f} at {self.velocity_vacuum:+.1f} km/s"
        )


def medium_odds(features, catalogue, options) -> MediumOdds:
    """features: FeatureTable whose ``wave`` holds the file's own, unconverted numbers."""
    low, high = options.velocity_range
    span = (low - SPREAD, high + SPREAD)
    as_air = replace(features, wave=air_to_vacuum(features.wave))
    score_air, velocity_air = _best(as_air, catalogue, span)
    score_vacuum, velocity_vacuum = _best(features, catalogue, span)
    difference = np.clip((score_air - score_vacuum) / SOFTENING, -30, 30)
    air = float(1.0 / (1.0 + np.exp(-difference)))
    return MediumOdds(air, 1.0 - air, velocity_air, velocity_vacuum)


def _best(features, catalogue, span) -> tuple[float, float]:
    """(largest log-likelihood, its velocity) over temperatures and over both kinds of line."""
    if len(features) == 0:
        return 0.0, float("nan")
    near = catalogue.between(features.wave.min() * 0.997, features.wave.max() * 1.003)
    votes = [emission_vote(features, near, span)]
    for t in COARSE:
        strength = absorption_strength(near, t, electron_pressure(t))
        votes.append(stellar_vote(features, near, strength, span))
    best = max(votes, key=lambda v: float(np.max(v.score)))
    return float(np.max(best.score)), best.velocity
