"""Widths with the instrument's taken out, and where the instrument's width comes from."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from measure_simulation import FWHM_PER_SIGMA, spectrum_of
from measured_session import session_of

from linewright.job.view_width import (
    GIVEN, HEADER, NARROWEST, TELLURIC, kept_widths, widths_of,
)
from linewright.measure import measure_spectrum
from linewright.measure.intrinsic import intrinsic_width, lorentzian_width
from linewright.session.model import Claim

POWER = 30_000.0


def test_quadrature_and_its_error():
    """3-4-5: the error by propagation against 200,000 random draws."""
    width, error = intrinsic_width(5.0, 0.05, 4.0, 0.04)
    assert width == pytest.approx(3.0)
    rng = np.random.default_rng(0)
    drawn = np.sqrt((5 + 0.05 * rng.standard_normal(200_000)) ** 2
                    - (4 + 0.04 * rng.standard_normal(200_000)) ** 2)
    assert error == pytest.approx(drawn.std(), rel=0.02)


def test_a_line_no_broader_than_the_instrument_has_no_width():
    width, error = intrinsic_width(
        np.array([4.05, 3.0, np.nan, 5.0]), np.array([0.05, 0.05, 0.1, np.nan]), 4.0, 0.0)
    assert np.isnan(width).all() and np.isnan(error).all()


@pytest.mark.parametrize("own", [0.3, 1.0, 4.0])
def test_lorentzian_widths_against_a_voigt_profile(own):
    """Half width of scipy's Voigt function; the approximation is good to 0.02 per cent."""
    from scipy.optimize import brentq
    from scipy.special import voigt_profile

    sigma, gamma = 1.0 / FWHM_PER_SIGMA, 0.5 * own
    half = brentq(lambda x: voigt_profile(x, sigma, gamma) - 0.5 * voigt_profile(0, sigma, gamma),
                  0.0, 10.0)
    assert lorentzian_width(2 * half, 1.0) == pytest.approx(own, rel=2e-3)


@pytest.fixture(scope="module")
def star():
    """(spectrum, Measurement, session, intrinsic FWHM of the broad lines): every third line is
    1.2 instrument widths broad by itself, the others have the instrument's width."""
    rng = np.random.default_rng(5)
    step = 5000.0 / POWER / 5.0
    wave = 5000.0 + step * np.arange(24_000)
    y, own = np.zeros(len(wave)), 1.2 * 5000.0 / POWER
    for i, centre in enumerate(5002.0 + 1.9 * np.arange(410)):
        fwhm = np.hypot(centre / POWER, own if i % 3 == 0 else 0.0)
        u = (wave - centre - rng.uniform(-0.2, 0.2)) / fwhm * FWHM_PER_SIGMA
        y += 0.4 * np.exp(-0.5 * np.minimum(u * u, 1400.0))
    flux = 1000.0 * (1.0 - y + rng.standard_normal(len(wave)) / 100.0)
    spectrum = spectrum_of(wave, flux, np.full(len(wave), 10.0))
    return spectrum, measure_spectrum(spectrum), session_of(spectrum), own


def test_a_given_resolving_power_gives_the_lines_own_widths_back(star):
    _, _, session, own = star
    widths = widths_of(replace(session, options={"resolution": POWER}))
    seen = np.isfinite(widths.intrinsic)
    assert widths.source == GIVEN and 125 <= seen.sum() <= 150  # of 137 broad lines
    near = seen & (np.abs(widths.intrinsic - own) < 0.5 * own)
    assert near.sum() >= 133
    pull = (widths.intrinsic - own)[near] / widths.intrinsic_err[near]
    assert abs(pull.mean()) < 0.35 and 0.8 < pull.std() < 1.2


def test_the_header_the_narrowest_lines_and_the_air_say_whose_width_it_is(star):
    spectrum, found, session, _ = star
    kept = kept_widths(found, None)
    narrow = widths_of(replace(session, measurement=kept))
    # two of three lines are as narrow as the instrument: a little wider as a whole
    assert narrow.source == NARROWEST
    assert np.median(session.features.wave / narrow.instrument) == pytest.approx(POWER, rel=0.15)
    header = widths_of(replace(session, measurement=kept_widths(found, 40_000.0)))
    assert header.source == HEADER
    np.testing.assert_allclose(header.instrument, session.features.wave / 40_000.0)
    sharp = session.features.fwhm < 1.2 * session.features.wave / POWER
    claims = tuple(Claim(origin="telluric" if s else "stellar", standing="firm") for s in sharp)
    air = widths_of(replace(session, measurement=kept, claims=claims))
    assert air.source == TELLURIC
    assert np.median(session.features.wave / air.instrument) == pytest.approx(POWER, rel=0.03)
