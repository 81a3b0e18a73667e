"""The options of a solve, frozen and plain, so that they can be kept in the session."""

from __future__ import annotations

from dataclasses import asdict, dataclass


@dataclass(frozen=True)
class SolveOptions:
    """Choices of one solve; the defaults suit an unknown star.

    velocity: km/s, or None to find it; velocity_range: km/s searched
    resolution: resolving power, None to measure it; vsini: km/s
    temperature: K, or None for automatic; log_pe: log10 of electron pressure in
        dyn cm-2, None for automatic; metallicity: [M/H] dex; abundances: [X/Fe] dex
    species: only these are considered when not empty
    ranges: own-medium Angstrom ranges to search, empty for all
    coverage: own-medium ranges searched (feature tables); empty means unknown
    wave_err: Angstrom, for feature tables without errors
    seed: of every random draw
    """

    velocity: float | None = None
    velocity_range: tuple[float, float] = (-500.0, 500.0)
    resolution: float | None = None
    vsini: float | None = None
    temperature: float | None = None
    log_pe: float | None = None
    metallicity: float = 0.0
    abundances: tuple[tuple[str, float], ...] = ()
    species: tuple[str, ...] = ()
    ranges: tuple[tuple[float, float], ...] = ()
    coverage: tuple[tuple[float, float], ...] = ()
    wave_err: float | None = None
    seed: int = 0

    def as_dict(self) -> dict:
        return asdict(self)
