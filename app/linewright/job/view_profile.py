"""The fitted profile of one feature, for drawing."""

from __future__ import annotations

import numpy as np

from ..session.model import Session

SIGMA_PER_FWHM = 1.0 / (2.0 * np.sqrt(2.0 * np.log(2.0)))


def profile_of(session: Session, number: int) -> tuple[np.ndarray, np.ndarray] | None:
    """(vacuum Angstrom, flux) of the Gaussian with the feature's centre, depth and FWHM.

    Drawn on the pseudo-continuum at the feature; None where it was not measured.
    """
    f = session.features
    i = session.index_of(number)
    numbers = (f.wave[i], f.fwhm[i], f.depth[i], f.continuum[i])
    if not np.all(np.isfinite(numbers)) or f.fwhm[i] <= 0:
        return None
    x = np.linspace(-2.0, 2.0, 161) * f.fwhm[i]
    shape = np.exp(-0.5 * (x / (f.fwhm[i] * SIGMA_PER_FWHM)) ** 2)
    return f.wave[i] + x, f.continuum[i] * (1.0 - f.depth[i] * shape)
