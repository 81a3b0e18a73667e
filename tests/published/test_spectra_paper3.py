"""Spectral axis codes of FITS Paper III worked by hand.

Formulas: Greisen, Calabretta, Valdes & Allen 2006, A&A 446, 747: tables 3 (relations between
frequency, wavelength and velocities), section 3.2 (-LOG, non-linear codes: linear in X, given
in S) and section 5 (grisms). Everything below is computed here from those formulas alone.
"""

from __future__ import annotations

import numpy as np
import pytest
from astropy.io import fits

from linewright.spectra.axis import header_axis

C = 299792458.0  # m/s
H = 6.62607015e-34  # J s
REST = 6.562819e-7  # m
PIXELS = np.arange(1001) - 250.0  # CRPIX1 = 251


def angstrom(**cards) -> np.ndarray:
    header = fits.Header()
    header.update(NAXIS=1, NAXIS1=1001, CRPIX1=251.0)
    header.update(cards)
    axis = header_axis(header, 1001, "header")
    return axis.unit.to_angstrom(axis.values)


def wave_of(kind: str, s):
    """Vacuum wavelength in metres of a value of that kind (SI), Paper III table 3."""
    if kind in ("WAVE", "AWAV"):
        return s
    if kind == "FREQ":
        return C / s
    if kind == "ENER":
        return H * C / s
    if kind == "WAVN":
        return 1.0 / s
    if kind == "VRAD":  # nu = nu0 (1 - V/c)
        return REST / (1 - s / C)
    if kind == "VOPT":  # lambda = lambda0 (1 + Z/c)
        return REST * (1 + s / C)
    if kind == "ZOPT":
        return REST * (1 + s)
    beta = s if kind == "BETA" else s / C
    return REST * np.sqrt((1 + beta) / (1 - beta))


LINEAR = (("WAVE", 6.5e-7, 1e-11), ("AWAV", 6.5e-7, 1e-11), ("FREQ", 4.6e14, 5e9),
          ("ENER", 3.0e-19, 1e-23), ("WAVN", 1.5e6, 20.0), ("VRAD", 1e5, 800.0),
          ("VOPT", 1e5, 800.0), ("ZOPT", 3e-4, 3e-6), ("VELO", 1e5, 800.0), ("BETA", 3e-4, 3e-6))


@pytest.mark.parametrize(("kind", "start", "step"), LINEAR, ids=[r[0] for r in LINEAR])
def test_linear_axes(kind, start, step):
    found = angstrom(CTYPE1=kind, CRVAL1=start, CDELT1=step, RESTWAV=REST)
    assert np.allclose(found, 1e10 * wave_of(kind, start + step * PIXELS), rtol=1e-12, atol=0)


@pytest.mark.parametrize("kind", ["WAVE", "AWAV", "FREQ", "WAVN"])
def test_log_axes(kind):
    """S = S_r exp(w / S_r), equation 5."""
    start, step = {"FREQ": (4.6e14, 5e9), "WAVN": (1.5e6, 20.0)}.get(kind, (6.5e-7, 1e-11))
    found = angstrom(CTYPE1=f"{kind}-LOG", CRVAL1=start, CDELT1=step)
    assert np.allclose(found, 1e10 * wave_of(kind, start * np.exp(step * PIXELS / start)),
                       rtol=1e-9, atol=0)


def linear_in(x_of, s_of, start: float, step: float):
    """S where X is linear in pixels and dS/dw = 1 at the reference: X = X_r + w dX/dS."""
    delta = 1e-6 * start if start else 1e-3
    slope = (x_of(start + delta) - x_of(start - delta)) / (2 * delta)
    return s_of(x_of(start) + step * PIXELS * slope)


def velocity(wave):
    """Relativistic velocity of a wavelength, m/s (VELO)."""
    z2 = (wave / REST) ** 2
    return C * (z2 - 1) / (z2 + 1)


# code: S in terms of pixels for S linear in X
SAMPLED = {
    "WAVE-F2W": (6.5e-7, 1e-11, lambda a, b: linear_in(lambda s: C / s, lambda x: C / x, a, b)),
    "FREQ-W2F": (4.6e14, 5e9, lambda a, b: linear_in(lambda s: C / s, lambda x: C / x, a, b)),
    "WAVE-V2W": (6.5e-7, 1e-11, lambda a, b: linear_in(
        velocity, lambda v: wave_of("VELO", v), a, b)),
    "VELO-F2V": (1e5, 800.0, lambda a, b: linear_in(
        lambda v: C / wave_of("VELO", v), lambda f: velocity(C / f), a, b)),
    "VOPT-F2W": (1e5, 800.0, lambda a, b: linear_in(
        lambda v: C / wave_of("VOPT", v), lambda f: C * (C / f / REST - 1), a, b)),
    "VELO-W2V": (1e5, 800.0, lambda a, b: linear_in(
        lambda v: wave_of("VELO", v), velocity, a, b)),
    "ZOPT-F2W": (3e-4, 3e-6, lambda a, b: linear_in(
        lambda z: C / wave_of("ZOPT", z), lambda f: C / f / REST - 1, a, b)),
    "ENER-W2F": (3.0e-19, 1e-23, lambda a, b: linear_in(
        lambda e: H * C / e, lambda w: H * C / w, a, b)),
}


@pytest.mark.parametrize("code", SAMPLED)
def test_axes_linear_in_another_quantity(code):
    start, step, by_hand = SAMPLED[code]
    found = angstrom(CTYPE1=code, CRVAL1=start, CDELT1=step, RESTWAV=REST)
    expected = 1e10 * wave_of(code[:4], by_hand(start, step))
    assert np.allclose(found, expected, rtol=1e-9, atol=0)


@pytest.mark.parametrize(("grooves", "order", "alpha", "index", "slope"), [
    (3e5, 1.0, 20.0, 1.0, 0.0), (4.5e5, 1.0, 27.0, 1.765, -1.077e6)])
def test_grisms(grooves, order, alpha, index, slope):
    """lambda of the grism equation for a detector normal to the camera axis (theta = 0)."""
    start, step = 5e-7, 1e-10
    sine, gm = np.sin(np.radians(alpha)), grooves * order
    at_reference = np.arcsin(gm * start - index * sine)
    reach = step * PIXELS * (gm - slope * sine) / np.cos(at_reference)
    angle = at_reference + np.arctan(reach)
    by_hand = ((index - slope * start) * sine + np.sin(angle)) / (gm - slope * sine)
    cards = {"PV1_0": grooves, "PV1_1": order, "PV1_2": alpha, "PV1_3": index, "PV1_4": slope}
    found = angstrom(CTYPE1="WAVE-GRI", CRVAL1=start, CDELT1=step, **cards)
    assert np.allclose(found, 1e10 * by_hand, rtol=1e-9, atol=0)
    assert np.array_equal(found, angstrom(CTYPE1="AWAV-GRA", CRVAL1=start, CDELT1=step, **cards))
