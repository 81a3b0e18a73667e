"""The fitted profile of one feature, for drawing."""

from __future__ import annotations

import numpy as np

from ..measure import fit_profile
from ..measure.gauss import FWHM_PER_SIGMA
from ..measure.groups import component_sum
from ..measure.shapes import profile
from ..session.model import HandFit, Session
from .hand_trace import SHAPES

REACH = 1.5  # FWHM on either side: beyond, other features have their own profiles


def profile_of(session: Session, number: int) -> tuple[np.ndarray, np.ndarray] | None:
    """(vacuum Angstrom, flux) of the fit with its neighbours, on the feature's continuum.

    None where the feature was not measured, or was integrated and has no profile.
    """
    f, row = session.features, session.index_of(number)
    numbers = (f.wave[row], f.fwhm[row], f.depth[row], f.continuum[row])
    if not np.all(np.isfinite(numbers)) or f.fwhm[row] <= 0:
        return None
    if "integrated" in f.flags[row].split():
        return None
    fit = session.fit_of(number)
    if fit is not None and len(fit.params) == len(fit.features):
        return _by_hand(session, fit)
    wave, flux = fit_profile(f, row, neighbours=True)
    near = np.abs(wave - f.wave[row]) <= REACH * f.fwhm[row]
    return wave[near], flux[near]


def _by_hand(session: Session, fit: HandFit) -> tuple[np.ndarray, np.ndarray]:
    """The fitted profile between its limits, with the neighbours."""
    f, rows = session.features, [session.index_of(n) for n in fit.features]
    wave = np.linspace(*fit.limits, max(121, 60 * len(rows)))
    words = [set(flags.split()) for flags in f.flags]
    plain = np.array([not w & {"integrated", "spike"} for w in words], dtype=bool)
    plain &= (f.segment == f.segment[rows[0]]) & np.isfinite(f.continuum)
    plain[rows] = True
    order = np.flatnonzero(plain)[np.argsort(f.wave[plain])]
    level = np.interp(wave, f.wave[order], f.continuum[order])  # lowered in wings
    shape = SHAPES.get(fit.profile, fit.profile)
    y = sum(profile(shape, wave, np.array(p))[0] for p in fit.params)
    near = (f.segment == f.segment[rows[0]]) & (np.nan_to_num(f.fwhm) > 0) & np.isfinite(f.depth)
    near &= (f.wave > fit.limits[0] - 3.0 * f.fwhm) & (f.wave < fit.limits[1] + 3.0 * f.fwhm)
    near &= plain
    near[rows] = False
    others = np.c_[f.depth[near], f.wave[near], np.log(f.fwhm[near] / FWHM_PER_SIGMA)]
    return wave, level * (1.0 - y - component_sum(wave, others))
