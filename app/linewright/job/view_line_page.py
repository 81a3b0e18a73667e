"""What the window tells of one catalogue line, and that line as a person's claim."""

from __future__ import annotations

import numpy as np

from ..lines.catalogue import ORIGINS, LineCatalogue
from ..lines.page import LinePage, line_page
from ..session.model import Candidate, Session
from ..spectra.medium import C_KM_S
from .view_depths import ASSUMED_K

NAN = float("nan")


def page_for(catalogue: LineCatalogue, row: int, session: Session | None, span) -> LinePage:
    """The page of a line at the session's temperature.

    span: vacuum range of the spectrum, Angstrom, where strong lines of the species are told;
    None for the optical range. Raises InputRefused for a row the catalogue does not have.
    """
    known = session is not None and np.isfinite(session.temperature_k)
    temperature = float(session.temperature_k) if known else ASSUMED_K
    return line_page(catalogue, row, temperature, *(() if span is None else (span,)))


def velocity_of(session: Session, origin: str) -> float:
    """km/s of the session's component of this origin: its own velocity for the star's lines
    and where there is none, 0 for what stands still over the telescope."""
    if origin != "stellar":
        for name, velocity, _error in session.components:
            if name == origin:
                return float(velocity)
        if origin in ("telluric", "sky", "lamp"):
            return 0.0
    v = session.velocity.velocity
    return float(v) if np.isfinite(v) else 0.0


def line_as_candidate(
    catalogue: LineCatalogue, row: int, depth: np.ndarray | None, session: Session, number: int
) -> Candidate:
    """The line as the explanation of a feature; the engine gave it no probability (NaN).

    offset_sigma: (feature - line)/sigma, sigma from both wavelength errors, at the velocity
    of the line's component. Raises KeyError for an unknown feature.
    """
    c, f, at = catalogue, session.features, session.index_of(number)
    origin = ORIGINS[int(c.origin[row])]
    velocity = velocity_of(session, origin)
    expected = float(c.wave[row]) * (1.0 + velocity / C_KM_S)
    sigma = float(np.hypot(np.nan_to_num(f.wave_err[at]), c.wave_err[row]))
    predicted = NAN if depth is None or np.isfinite(c.emission[row]) else float(depth[row])
    return Candidate(
        c.species_of(row), origin, float(c.wave[row]), float(c.wave_err[row]),
        float(c.e_low[row]), float(c.loggf[row]), velocity, NAN, NAN,
        (float(f.wave[at]) - expected) / sigma if sigma > 0 else NAN, predicted,
        c.source_keys[int(c.source[row])] if len(c.source_keys) else "")


def widths_away(session: Session, number: int, line: Candidate) -> float:
    """How many widths (FWHM, at least 0.1 Angstrom) a feature stands from a line's place."""
    f, at = session.features, session.index_of(number)
    expected = line.wave * (1.0 + line.velocity / C_KM_S)
    return abs(float(f.wave[at]) - expected) / max(float(np.nan_to_num(f.fwhm[at])), 0.1)
