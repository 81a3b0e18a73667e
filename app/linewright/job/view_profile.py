"""The fitted profile of one feature, for drawing."""

from __future__ import annotations

import numpy as np

from ..measure import fit_profile
from ..session.model import Session

REACH = 1.5  # FWHM on either side: beyond, other features have their own profiles


def profile_of(session: Session, number: int) -> tuple[np.ndarray, np.ndarray] | None:
    """(vacuum Angstrom, flux) of the fit with its neighbours, on the feature's continuum.

    None where the feature was not measured.
    """
    f, row = session.features, session.index_of(number)
    numbers = (f.wave[row], f.fwhm[row], f.depth[row], f.continuum[row])
    if not np.all(np.isfinite(numbers)) or f.fwhm[row] <= 0:
        return None
    wave, flux = fit_profile(f, row, neighbours=True)
    near = np.abs(wave - f.wave[row]) <= REACH * f.fwhm[row]
    return wave[near], flux[near]
