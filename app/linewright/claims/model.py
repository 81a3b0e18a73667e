"""What the engine says of features: claims, candidates, velocity, Roll call, Orphans."""

from __future__ import annotations

import math
from dataclasses import dataclass, field

import numpy as np

STANDINGS = ("firm", "likely", "tentative", "unclaimed", "set aside")


def standing_of(probability: float) -> str:
    """The machine's standing by the contract: 0.95 firm, 0.80 likely, 0.50 tentative."""
    if not np.isfinite(probability) or probability < 0.50:
        return "unclaimed"
    if probability < 0.80:
        return "tentative"
    return "likely" if probability < 0.95 else "firm"


@dataclass(frozen=True)
class Candidate:
    """One catalogue line as the explanation of one feature.

    wave, wave_err: laboratory vacuum wavelength, Angstrom; e_low in eV; loggf in dex
    velocity: of the component it belongs to, or of its ion in it, km/s
    probability: that this line is the main contributor
    share: of the predicted opacity (emissivity) within a resolution element
    offset_sigma: (feature - line)/sigma at the component's velocity
    depth_predicted: predicted central depth, negative in emission, NaN unknown
    weights: the breakdown of its probability (breakdown.Breakdown), empty where it has none
    """

    species: str
    origin: str
    wave: float
    wave_err: float
    e_low: float
    loggf: float
    velocity: float
    probability: float
    share: float
    offset_sigma: float
    depth_predicted: float
    source: str
    weights: tuple[float, ...] = ()


@dataclass(frozen=True)
class Claim:
    """What one feature is said to be.

    ``candidates`` are ranked; the first is the machine's best line. ``species`` is the
    claimed species (a person's may differ from the machine's best); empty when nothing
    comes near. ``chosen`` is the claimed line when it is not ``candidates[0]``.
    ``blend``: other contributors as (species, vacuum wavelength, share).
    """

    species: str = ""
    probability: float = 0.0
    p_line: float = 0.0
    p_unlisted: float = 1.0
    standing: str = "unclaimed"
    by: str = "machine"
    origin: str = "unknown"
    candidates: tuple[Candidate, ...] = ()
    chosen: Candidate | None = None
    blend: tuple[tuple[str, float, float], ...] = ()
    runner_up: str = ""
    flags: str = ""
    note: str = ""
    locked: bool = False

    @property
    def line(self) -> Candidate | None:
        """The claimed line."""
        if self.chosen is not None:
            return self.chosen
        return self.candidates[0] if self.candidates else None


@dataclass(frozen=True, eq=False)
class VelocityResult:
    """The stellar (or nebular) velocity with its honesty.

    velocity, error: km/s (NaN when nothing could be found)
    margin: log-likelihood above the best rival elsewhere; declared: margin sufficed
    rivals: (km/s, log-likelihood below the best); grid, score: the curve over velocity
    how: 'voting', 'template', 'given'
    """

    velocity: float = math.nan
    error: float = math.nan
    margin: float = 0.0
    declared: bool = False
    rivals: tuple[tuple[float, float], ...] = ()
    grid: np.ndarray = field(default_factory=lambda: np.zeros(0))
    score: np.ndarray = field(default_factory=lambda: np.zeros(0))
    how: str = "voting"


@dataclass(frozen=True)
class RollRow:
    """One species of the Roll call (columns of the table contract), and what goes with it.

    limit_dex: the strength offset lies below this where the species is not seen (NaN: no
    limit); limit_wave: the line that says so, rest vacuum Angstrom; limit_ew: the equivalent
    width it would at least need, milliangstrom
    missing_wave, missing_depth: the strongest line expected and not seen; missing_shift: how
    many dex the offset would rise were it seen; gap_...: the same of the strongest line
    outside the coverage
    """

    species: str
    expected: int
    seen: int
    missing: int
    p_chance: float
    offset_dex: float
    offset_err: float
    verdict: str
    limit_dex: float = math.nan
    limit_wave: float = math.nan
    limit_ew: float = math.nan
    missing_wave: float = math.nan
    missing_depth: float = math.nan
    missing_shift: float = math.nan
    gap_wave: float = math.nan
    gap_depth: float = math.nan
    gap_shift: float = math.nan


@dataclass(frozen=True)
class Orphan:
    """A significant feature no catalogue line explains; ``why`` says what it is not."""

    feature: int
    p_unlisted: float
    nearest: str
    why: str
