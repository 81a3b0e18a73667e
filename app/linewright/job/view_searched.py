"""Where features were looked for, as the window asks."""

from __future__ import annotations

from ..session.model import Session
from ..spectra.medium import to_medium


def searched(session: Session, wave: float) -> bool:
    """Whether the coverage holds this vacuum wavelength (Angstrom); True where it is not known."""
    ranges = session.spectrum.coverage
    return not ranges or any(low <= wave <= high for low, high in ranges)


def searched_range(session: Session) -> tuple[float, float] | None:
    """First and last wavelength searched, in the spectrum's own medium; None where unknown."""
    ranges, medium = session.spectrum.coverage, session.spectrum.medium
    if not ranges:
        return None
    low, high = min(r[0] for r in ranges), max(r[1] for r in ranges)
    return float(to_medium(low, medium)), float(to_medium(high, medium))
