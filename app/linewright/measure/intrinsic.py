"""Widths of lines with the instrument's taken out."""

from __future__ import annotations

import numpy as np

SURE = 3.0  # sigmas by which a line must be broader than the instrument
A, B = 0.5346, 0.2166  # Olivero & Longbothum 1977, J. Quant. Spectrosc. Radiat. Transf. 17, 233


def intrinsic_width(fwhm, fwhm_err, instrument, instrument_err):
    """(intrinsic FWHM, one sigma), same unit and shape as ``fwhm``.

    Gaussians add in quadrature: w^2 = fwhm^2 - instrument^2, and by propagation
    sigma_w = hypot(fwhm fwhm_err, instrument instrument_err) / w. NaN where an input is, and
    where fwhm does not exceed the instrument's by SURE of the errors of both.
    """
    fwhm, instrument = np.asarray(fwhm, dtype=float), np.asarray(instrument, dtype=float)
    broader = fwhm - instrument > SURE * np.hypot(fwhm_err, instrument_err)
    square = np.where(broader, fwhm**2 - instrument**2, np.nan)
    width = np.sqrt(square)
    return width, np.hypot(fwhm * fwhm_err, instrument * instrument_err) / width


def lorentzian_width(fwhm, instrument):
    """FWHM L of a Lorentzian that a Gaussian of ``instrument`` broadens to ``fwhm``:
    fwhm = A L + sqrt(B L^2 + instrument^2) (Olivero & Longbothum 1977, to 0.02 per cent)."""
    fwhm, instrument = np.asarray(fwhm, dtype=float), np.asarray(instrument, dtype=float)
    a = A * A - B
    root = np.sqrt(np.maximum((A * fwhm) ** 2 - a * (fwhm**2 - instrument**2), 0.0))
    return (A * fwhm - root) / a
