"""What an identification is told beforehand."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class ClaimOptions:
    """velocity: km/s or None to find it; velocity_range: km/s searched
    temperature: K or None; log_pe: log10 dyn cm-2 or None; metallicity: [M/H];
    abundances: [X/Fe] by element symbol; species: considered alone when not empty
    frame: of the spectrum, which bounds where telluric lines may stand
    complete: whether every detectable feature of the coverage is in the table
    """

    velocity: float | None = None
    velocity_range: tuple[float, float] = (-500.0, 500.0)
    temperature: float | None = None
    log_pe: float | None = None
    metallicity: float = 0.0
    abundances: tuple[tuple[str, float], ...] = ()
    species: tuple[str, ...] = ()
    frame: str = "unknown"
    complete: bool = True
