"""Odds of reading wavelengths as air or as vacuum, from the lines themselves.

The two readings differ by 82-85 km/s over the optical, nearly a velocity: only how that
difference bends with wavelength decides, and a tilt of the calibration can imitate part of
it. So each reading is weighed over all velocities and over a calibration tilt v(x) = t x,
x from -1 to 1 over the features, t normal around zero: the evidence of a reading is the mean
of its tempered likelihood over both. Telluric lines, where there are any, stand within 33 km/s of the
observer whatever the star does, and weigh in with that.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..claims.temperature import COARSE, electron_pressure
from ..claims.velocity import emission_vote, stellar_vote, telluric_vote, typical_width
from ..lines.strengths import absorption_strength
from ..spectra.medium import C_KM_S, air_to_vacuum

SOFTENING = 3.0  # log-likelihoods are divided by this: votes are not independent
SPREAD = 100.0  # km/s added to the search, since the readings differ by 85
TILT_KMS = 0.3  # one sigma of the tilt over half the range: usual in good calibrations
TILT_OF_WIDTH = 0.03  # the same as a share of the line width, for low resolution
TILT_NODES = np.array([-3.0, -2.25, -1.5, -0.75, 0.0, 0.75, 1.5, 2.25, 3.0])
DECIDED = 0.95
OBSERVER_KMS = {"topocentric": 1.5, "geocentric": 1.5, "rest": None}  # others: 33 km/s
ASTRAY = 0.02  # prior share of telluric lines being of no use


@dataclass(frozen=True)
class MediumOdds:
    """air, vacuum: probabilities; velocities in km/s under each reading; tilts in km/s
    (over half the range) where each reading fits best; tilt_sigma: its assumed spread."""

    air: float
    vacuum: float
    velocity_air: float
    velocity_vacuum: float
    tilt_air: float = 0.0
    tilt_vacuum: float = 0.0
    tilt_sigma: float = TILT_KMS

    @property
    def decided(self) -> str:
        """'air', 'vacuum', or '' while neither reaches 0.95."""
        if max(self.air, self.vacuum) < DECIDED:
            return ""
        return "air" if self.air > self.vacuum else "vacuum"

    def in_words(self) -> str:
        hint = f"the lines favour {self.decided}" if self.decided else "the lines do not decide"
        return (
            f"air {self.air:.2f} at {self.velocity_air:+.1f} km/s, "
            f"vacuum {self.vacuum:.2f} at {self.velocity_vacuum:+.1f} km/s, "
            f"calibration tilt of {self.tilt_sigma:.1f} km/s allowed: {hint}"
        )


@dataclass(frozen=True)
class Reading:
    """log evidence of one reading, its best velocity and tilt, km/s."""

    evidence: float
    velocity: float
    tilt: float


def medium_odds(features, catalogue, options, frame: str = "unknown") -> MediumOdds:
    """features: FeatureTable whose ``wave`` holds the file's own, unconverted numbers; frame
    says how far telluric lines may stand from zero."""
    if len(features) == 0:
        return MediumOdds(0.5, 0.5, float("nan"), float("nan"))
    low, high = options.velocity_range
    span = (low - SPREAD, high + SPREAD)
    sigma = float(np.hypot(TILT_KMS, TILT_OF_WIDTH * typical_width(features)))
    as_air = replace(features, wave=air_to_vacuum(features.wave))
    air = _weigh(as_air, catalogue, span, sigma)
    vacuum = _weigh(features, catalogue, span, sigma)
    difference = air.evidence - vacuum.evidence + _telluric(
        as_air, catalogue, frame) - _telluric(features, catalogue, frame)
    share = float(1.0 / (1.0 + np.exp(-np.clip(difference, -30, 30))))
    return MediumOdds(share, 1.0 - share, air.velocity, vacuum.velocity, air.tilt, vacuum.tilt,
                      sigma)


def _telluric(features, catalogue, frame: str) -> float:
    """Log evidence of the telluric lines: their tempered likelihood over likely shifts."""
    limit = OBSERVER_KMS.get(frame, 33.0)
    if limit is None:
        return 0.0
    found = telluric_vote(features, catalogue, "unknown", (-150.0, 150.0))
    likely = np.abs(found.grid) <= limit
    if not np.any(likely) or not np.isfinite(found.velocity):
        return 0.0
    # against the usual level: most features in telluric bands may be the star's own
    tempered = (found.score[likely] - np.median(found.score)) / SOFTENING
    top = max(float(tempered.max()), 0.0)
    mean = float(np.mean(np.exp(tempered - top)))
    return float(top + np.log((1.0 - ASTRAY) * mean + ASTRAY * np.exp(-top)))


def tilted(features, tilt: float):
    """Features with a tilt taken out: wave / (1 + t x / c), x from -1 to 1 over them."""
    low, high = float(features.wave.min()), float(features.wave.max())
    x = 2.0 * (features.wave - low) / max(high - low, 1e-9) - 1.0
    return replace(features, wave=features.wave / (1.0 + tilt * x / C_KM_S))


def _weigh(features, catalogue, span, sigma: float) -> Reading:
    voter = _best_voter(features, catalogue, span)
    prior = np.exp(-0.5 * TILT_NODES**2)
    logs, places = [], []
    for node, weight in zip(TILT_NODES, prior / prior.sum(), strict=True):
        found = voter(tilted(features, node * sigma))
        tempered = found.score / SOFTENING
        top = float(tempered.max())
        logs.append(top + np.log(np.mean(np.exp(tempered - top))) + np.log(weight))
        places.append((float(found.score.max()), found.velocity, node * sigma))
    _, velocity, tilt = max(places)
    top = max(logs)
    return Reading(float(top + np.log(np.sum(np.exp(np.array(logs) - top)))), velocity, tilt)


def _best_voter(features, catalogue, span):
    """The vote (features -> Vote) that explains the features best: one of several
    temperatures, or emission lines."""
    near = catalogue.between(features.wave.min() * 0.997, features.wave.max() * 1.003)
    voters = [lambda f: emission_vote(f, near, span)]
    for t in COARSE:
        strength = absorption_strength(near, t, electron_pressure(t))
        voters.append(lambda f, s=strength: stellar_vote(f, near, s, span))
    return max(voters, key=lambda vote: float(np.max(vote(features).score)))
