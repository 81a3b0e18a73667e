"""The Earth's motion against published values and observatories' own headers."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.spectra.earth_motion import corrected, correction
from linewright.spectra.medium import C_KM_S
from linewright.spectra.observation import Observation
from linewright.spectra.reading import read_spectrum
from linewright.spectra.sites import SITES, Site

SHARED = Path(__file__).resolve().parents[2].parent / "shared" / "spectra"
needs_shared = pytest.mark.skipif(
    not SHARED.is_dir(), reason="the shared spectra do not stand beside this checkout")
# Site and stars as in the tests published with Wright & Eastman 2014, PASP 126, 838 (Kanodia &
# Wright 2018, RNAAS 2, 4): corrections in m/s for a measured velocity of zero.
TOLOLO = Site("Cerro Tololo", -30.169283, -70.806789, 2241.9)
TAU_CETI = Observation(site=TOLOLO, ra=26.0213645867, dec=-15.9395557246, pm_ra=-1721.05,
                       pm_dec=854.16, parallax=273.96, epoch=2000.0)
# The Hipparcos solution (ESA 1997, HIP 8102) stands at epoch 1991.25; numbers from memory.
TAU_CETI_HIP = Observation(site=TOLOLO, ra=26.02136459, dec=-15.93955572, pm_ra=-1721.82,
                           pm_dec=854.07, parallax=274.17, epoch=1991.25)


@pytest.mark.parametrize(("fraction", "published"), [
    (0.0, 15407.4860), (1e-5, 15407.4723), (2e-5, 15407.4586)])
def test_tau_ceti_with_full_astrometry(fraction, published):
    found = correction(replace(TAU_CETI, time=(2458000.0, fraction)))
    assert 1e3 * found.velocity == pytest.approx(published, abs=0.01)  # asked for: 1 m/s


def test_tau_ceti_as_catalogued_by_hipparcos():
    found = correction(replace(TAU_CETI_HIP, time=(2458000.0, 0.0)))
    assert 1e3 * found.velocity == pytest.approx(15403.9508, abs=0.05)


# Barnard's star and Arcturus with the same code of Kanodia & Wright 2018 on JPL DE421.
OTHERS = (
    (Observation(Site("", 31.9599, -111.5997, 2096.0), 269.4520825, 4.6933914, -798.58, 10328.12,
                 548.31, -110.6, 2000.0, (2457000.0, 0.3)), -5754.0986),
    (Observation(Site("", 43.9308, 5.7133, 650.0), 213.9153003, 19.1824092, -1093.39, -2000.06,
                 88.83, -5.19, 2000.0, (2459300.0, 0.5)), 8433.3248),
)


@pytest.mark.parametrize(("seen", "published"), OTHERS, ids=["Barnard", "Arcturus"])
def test_fast_stars(seen, published):
    assert 1e3 * correction(seen).velocity == pytest.approx(published, abs=0.05)


def test_proper_motion_without_a_parallax_leaves_the_perspective_out():
    """tau Ceti moved across the sky only: 15412.914 m/s, 5.4 more (astropy and DE421)."""
    flat = replace(TAU_CETI, parallax=float("nan"), time=(2458000.0, 0.0))
    assert 1e3 * correction(flat).velocity == pytest.approx(15412.914, abs=0.02)


def test_heliocentric_differs_from_barycentric():
    """15412.963 m/s heliocentric for tau Ceti propagated in position (reference run, DE421)."""
    flat = replace(TAU_CETI, parallax=float("nan"), time=(2458000.0, 0.0))
    assert 1e3 * correction(flat, "heliocentric").velocity == pytest.approx(15412.963, abs=0.02)


def test_future_dates_work_without_a_network(monkeypatch):
    """A year on, the Earth is back within a day's motion; nothing may be fetched."""
    import urllib.request

    def forbidden(*_, **__):
        raise AssertionError("a network was asked")

    monkeypatch.setattr(urllib.request, "urlopen", forbidden)
    here = 1e3 * correction(replace(TAU_CETI, time=(2458000.0, 0.0))).velocity
    later = 1e3 * correction(replace(TAU_CETI, time=(2458000.0 + 60 * 365.25, 0.0))).velocity
    assert abs(later - here) < 1500 and later != here


@needs_shared
@pytest.mark.parametrize(("name", "kind", "stated", "tolerance"), [
    # Reductions of the observatories themselves. HARPS weighs the exposure by its flux and knows
    # the star's motion; UVES takes the pointing. The sign is the one to apply.
    ("mdwarf_r115000_s1d.fits", "barycentric", -23.5438771778635, 0.010),
    ("ttauri_r40000_blue.fits", "barycentric", -27.503564, 0.015),
    ("ttauri_r40000_blue.fits", "heliocentric", -27.508754, 0.015),
    ("fstar_hband_r22500.fits", "barycentric", 11.2977627448, 0.015),
])
def test_the_corrections_of_real_headers(name, kind, stated, tolerance):
    seen = read_spectrum(SHARED / name).observation
    assert seen.missing() == ()
    assert correction(seen, kind).velocity == pytest.approx(stated, abs=tolerance)


@needs_shared
def test_a_correction_is_multiplicative_and_never_applied_twice():
    star = read_spectrum(SHARED / "ttauri_r40000_blue.fits")
    moved = corrected(star, -27.5)
    assert np.allclose(moved.segments[0].wave, star.segments[0].wave * (1 - 27.5 / C_KM_S),
                       rtol=1e-15)
    assert moved.frame == "barycentric" and moved.observer_velocity == -27.5
    assert "-27.5000 km/s applied here" in moved.corrections[-1]
    with pytest.raises(InputRefused, match="not applied again"):
        corrected(moved, -27.5)
    with pytest.raises(InputRefused, match="not applied again"):
        corrected(read_spectrum(SHARED / "mdwarf_r115000_s1d.fits"), -23.54)
    with pytest.raises(InputRefused, match="does not say"):
        corrected(read_spectrum(SHARED / "sun_r47000.txt"), 1.0)
    again = read_spectrum(star.path, **moved.read_options)
    assert np.array_equal(again.segments[0].wave, moved.segments[0].wave)
    assert again.frame == "barycentric"


def test_what_is_missing_is_named():
    with pytest.raises(InputRefused, match="site .*coordinates.*time"):
        correction(Observation())


def test_the_number_is_checked():
    from linewright.spectra.spectrum import Segment, Spectrum

    wave = np.linspace(5000.0, 5010.0, 50)
    star = Spectrum((Segment(wave, wave, None, wave < 0),), "vacuum", frame="topocentric")
    with pytest.raises(InputRefused, match="more than the Earth moves"):
        corrected(star, 27500.0)


@pytest.mark.parametrize("name", ["La Silla", "Paranal"])
def test_two_sites_as_their_headers_give_them(name):
    """ESO TEL GEOLAT, GEOLON and GEOELEV of HARPS and UVES files."""
    known = {"La Silla": (-29.2584, -70.7345, 2400.0), "Paranal": (-24.6272, -70.4048, 2648.0)}
    site = SITES[name]
    assert (site.latitude, site.longitude, site.height) == known[name]
