"""What a session holds, all frozen: features, claims and how they were reached."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from ..claims.model import (
    STANDINGS,
    Candidate,
    Claim,
    Orphan,
    RollRow,
    VelocityResult,
    standing_of,
)
from ..claims.readings import TemperatureReading
from ..measure.features import FeatureTable

__all__ = [
    "Candidate",
    "Claim",
    "ContinuumNodes",
    "HandFit",
    "HistoryEntry",
    "Orphan",
    "RollRow",
    "STANDINGS",
    "Session",
    "SpectrumReference",
    "TemperatureReading",
    "VelocityResult",
    "standing_of",
]

@dataclass(frozen=True)
class SpectrumReference:
    """Which file the session speaks of. ``path`` is absolute in memory, relative in the file.

    coverage: searched (low, high) vacuum ranges, gaps and masks excluded
    """

    path: str
    name: str
    sha256: str
    medium: str
    medium_from: str
    frame: str
    frame_from: str
    layout: str
    flux_unit: str
    samples: int
    segments: int
    read_options: dict = field(default_factory=dict)
    coverage: tuple[tuple[float, float], ...] = ()
    from_features: bool = False


@dataclass(frozen=True, eq=False)
class ContinuumNodes:
    """Pseudo-continuum of one segment: linear between nodes (vacuum Angstrom, flux)."""

    wave: np.ndarray
    value: np.ndarray


@dataclass(frozen=True)
class HandFit:
    """A stretch a person had fitted. features: permanent numbers of its components, in order
    of wavelength; limits: (low, high) vacuum Angstrom; profile: one of
    ``session.fit_edits.PROFILES``; params: of each component as ``measure.shapes`` has them,
    relative to the features' own continuum.
    """

    features: tuple[int, ...]
    limits: tuple[float, float]
    profile: str
    params: tuple[tuple[float, ...], ...]


@dataclass(frozen=True)
class HistoryEntry:
    """One act: ``action`` is the edit's name, ``detail`` its arguments in plain data."""

    action: str
    detail: dict
    by: str


@dataclass(frozen=True, eq=False)
class Session:
    """Everything known about one spectrum; every edit returns a new one.

    claims: parallel to ``features``
    components: velocity components as (origin, km/s, km/s error)
    temperature_k, log_pe: as used for the strengths; temperatures: every one that was read,
        with its error and label, the adopted one first; warnings: for the reader
    anchors: continuum anchors a person laid, a segment each, without points where none; ()
        where there are none at all; fits: stretches fitted by hand
    """

    spectrum: SpectrumReference
    features: FeatureTable
    claims: tuple[Claim, ...]
    velocity: VelocityResult
    options: dict = field(default_factory=dict)
    components: tuple[tuple[str, float, float], ...] = ()
    temperature_k: float = float("nan")
    log_pe: float = float("nan")
    temperatures: tuple[TemperatureReading, ...] = ()
    roll_call: tuple[RollRow, ...] = ()
    orphans: tuple[Orphan, ...] = ()
    continuum: tuple[ContinuumNodes, ...] = ()
    anchors: tuple[ContinuumNodes, ...] = ()
    fits: tuple[HandFit, ...] = ()
    measurement: dict = field(default_factory=dict)
    catalogue_id: str = ""
    version: str = ""
    seed: int = 0
    warnings: tuple[str, ...] = ()
    history: tuple[HistoryEntry, ...] = ()

    def fit_of(self, number: int) -> HandFit | None:
        """The fit by hand this feature is a component of."""
        return next((fit for fit in self.fits if number in fit.features), None)

    def index_of(self, number: int) -> int:
        """Row of the feature with this permanent number; KeyError when absent."""
        rows = np.nonzero(self.features.number == number)[0]
        if len(rows) == 0:
            raise KeyError(number)
        return int(rows[0])
