"""What a session holds, all frozen: features, claims and how they were reached."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from ..measure.features import FeatureTable

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
    velocity: of the component it belongs to, km/s
    probability: that this line is the main contributor
    share: of the predicted opacity (emissivity) within a resolution element
    offset_sigma: (feature - line)/sigma at the component's velocity
    depth_predicted: predicted central depth, negative in emission, NaN unknown
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

    velocity: float = float("nan")
    error: float = float("nan")
    margin: float = 0.0
    declared: bool = False
    rivals: tuple[tuple[float, float], ...] = ()
    grid: np.ndarray = field(default_factory=lambda: np.zeros(0))
    score: np.ndarray = field(default_factory=lambda: np.zeros(0))
    how: str = "voting"


@dataclass(frozen=True)
class RollRow:
    """One species of the Roll call (columns of the table contract)."""

    species: str
    expected: int
    seen: int
    missing: int
    p_chance: float
    offset_dex: float
    offset_err: float
    verdict: str


@dataclass(frozen=True)
class Orphan:
    """A significant feature no catalogue line explains; ``why`` says what it is not."""

    feature: int
    p_unlisted: float
    nearest: str
    why: str


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
    temperature_k, log_pe: as used for the strengths; warnings: for the reader
    """

    spectrum: SpectrumReference
    features: FeatureTable
    claims: tuple[Claim, ...]
    velocity: VelocityResult
    options: dict = field(default_factory=dict)
    components: tuple[tuple[str, float, float], ...] = ()
    temperature_k: float = float("nan")
    log_pe: float = float("nan")
    roll_call: tuple[RollRow, ...] = ()
    orphans: tuple[Orphan, ...] = ()
    continuum: tuple[ContinuumNodes, ...] = ()
    measurement: dict = field(default_factory=dict)
    catalogue_id: str = ""
    version: str = ""
    seed: int = 0
    warnings: tuple[str, ...] = ()
    history: tuple[HistoryEntry, ...] = ()

    def index_of(self, number: int) -> int:
        """Row of the feature with this permanent number; KeyError when absent."""
        rows = np.nonzero(self.features.number == number)[0]
        if len(rows) == 0:
            raise KeyError(number)
        return int(rows[0])
