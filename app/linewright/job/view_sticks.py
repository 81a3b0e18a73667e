"""What is drawn where a session has no spectrum: its features as sticks on a level of one."""

from __future__ import annotations

import numpy as np

from ..session.model import Session
from ..spectra.spectrum import Segment, Spectrum

HALF = 2e-7  # half width of a stick's foot, as a share of its wavelength
PAST = 0.01  # of the range, shown beyond the outermost features without coverage


def stick_spectrum(session: Session) -> Spectrum | None:
    """A spectrum for drawing only: one, and at each feature a stick of its depth.

    Downwards in absorption, upwards in emission; features without a measured depth get no
    stick. Wavelengths are vacuum Angstrom. None without features.
    """
    f = session.features
    if not len(f):
        return None
    depth = np.nan_to_num(f.depth)
    order = np.argsort(f.wave, kind="stable")
    wave, depth = f.wave[order], depth[order]
    x = np.concatenate([wave * (1 - HALF), wave, wave * (1 + HALF), _ends(session, wave)])
    y = np.concatenate([np.ones(len(wave)), 1.0 - depth, np.ones(len(wave) + 2)])
    x, first = np.unique(x, return_index=True)
    segment = Segment(x, y[first], None, np.zeros(len(x), dtype=bool))
    return Spectrum((segment,), medium=session.spectrum.medium,
                    flux_unit="sticks of the measured depths")


def _ends(session: Session, wave: np.ndarray) -> np.ndarray:
    """(lowest, highest) wavelength of the level: the coverage, or just past the features."""
    pad = max(PAST * float(wave[-1] - wave[0]), 1.0)
    edges = [w for pair in session.spectrum.coverage for w in pair]
    low, high = float(wave[0]) - pad, float(wave[-1]) + pad
    return np.array([min([low, *edges]), max([high, *edges])])
