"""The spectrum as the core sees it: frozen, vacuum Angstrom, in segments."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np

from .medium import from_medium, to_medium

FRAMES = ("unknown", "topocentric", "geocentric", "heliocentric", "barycentric", "rest")
MEDIA = ("unknown", "air", "vacuum")


@dataclass(frozen=True, eq=False)
class Segment:
    """One run of samples (an order, a detector, or the whole spectrum).

    wave: vacuum wavelengths, Angstrom, strictly ascending, shape (n,)
    flux: shape (n,), any unit
    uncertainty: one sigma in flux units, shape (n,), or None
    mask: True where a sample must not be used, shape (n,); masked flux may be NaN
    """

    wave: np.ndarray
    flux: np.ndarray
    uncertainty: np.ndarray | None
    mask: np.ndarray


@dataclass(frozen=True, eq=False)
class Spectrum:
    """A reduced one-dimensional spectrum with what is known about it.

    ``medium`` and ``frame`` are 'unknown' where nothing says; the stored wavelengths of
    an unknown medium are the file's numbers, unconverted. ``*_from`` say how a thing is
    known. ``corrections`` lists velocity corrections already applied by others.
    ``read_options`` are the choices needed to read the same file again.
    ``observer_velocity``: km/s at which lines of the Earth's air must stand after a
    correction whose number is known, NaN otherwise. ``observation``: place, target and time
    (spectra.observation.Observation) where the file tells them, else None.
    """

    segments: tuple[Segment, ...]
    medium: str = "unknown"
    medium_from: str = "not stated"
    frame: str = "unknown"
    frame_from: str = "not stated"
    flux_unit: str = ""
    name: str = ""
    path: str = ""
    sha256: str = ""
    layout: str = ""
    corrections: tuple[str, ...] = ()
    warnings: tuple[str, ...] = ()
    resolution: float | None = None
    read_options: dict = field(default_factory=dict)
    observer_velocity: float = float("nan")
    observation: object | None = None

    @property
    def samples(self) -> int:
        return sum(len(s.wave) for s in self.segments)

    def with_medium(self, medium: str, source: str) -> Spectrum:
        """The same file read in another medium (wavelengths recomputed, not relabelled)."""
        if medium == self.medium:
            return replace(self, medium_from=source)
        segments = tuple(
            replace(s, wave=from_medium(to_medium(s.wave, self.medium), medium))
            for s in self.segments
        )
        return replace(self, segments=segments, medium=medium, medium_from=source)

    def own_range(self) -> tuple[float, float]:
        """(lowest, highest) wavelength in the spectrum's own medium, Angstrom."""
        low = min(float(s.wave[0]) for s in self.segments)
        high = max(float(s.wave[-1]) for s in self.segments)
        low, high = to_medium(np.array([low, high]), self.medium)
        return float(low), float(high)
