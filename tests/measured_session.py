"""A session of a measured, unsolved spectrum, for tests of work by hand."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from linewright.job.view_session import unsolved_session
from linewright.measure import measure_spectrum
from linewright.session.model import Claim, ContinuumNodes


def session_of(spectrum):
    """Measured features, each claim with a note that names its feature, and the continuum."""
    found = measure_spectrum(spectrum)
    nodes = tuple(ContinuumNodes(s.node_wave, s.node_flux) for s in found.segments)
    return replace(unsolved_session(spectrum), features=found.features, continuum=nodes,
                   claims=tuple(Claim(note=f"of {n}") for n in found.features.number.tolist()))


def nearest(session, wave) -> int:
    """Number of the feature nearest to a vacuum wavelength."""
    return int(session.features.number[np.argmin(np.abs(session.features.wave - wave))])
