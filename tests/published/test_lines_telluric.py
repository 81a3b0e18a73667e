"""Telluric lines against the Sun's spectrum through the Earth's air and broad-band depths.

Sources: O2 gamma band of the solar spectrum beside the checkout (Gaia-ESO reference; stellar
rest frame, so the band stands at an unknown shift); strengths of HITRAN 2004 (Rothman et al.
2005); direct-beam transmission of ASTM G173-03 at 761 and 687 nm, 0.115 and 0.600.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from linewright.lines.loading import load_catalogue
from linewright.spectra.medium import vacuum_to_air

SUN = Path(__file__).resolve().parents[2].parent / "shared" / "spectra" / "sun_r47000.txt"
C_KM_S = 299792.458


@pytest.fixture(scope="module")
def telluric():
    return load_catalogue(origins="telluric")


def gas(catalogue, name, low, high):
    air = vacuum_to_air(catalogue.wave)
    mine = (catalogue.species == catalogue.species_names.index(name)) & (air > low) & (air < high)
    return air[mine], catalogue.depth_ref[mine]


@pytest.mark.skipif(not SUN.is_file(), reason="the solar spectrum is not beside this checkout")
def test_oxygen_lines_of_the_sun_line_up_within_20_mA(telluric):
    """Lines deeper than 0.5 at 6287-6312 A, two solar blends (6298.46, 6302.00) left out."""
    air, depth = gas(telluric, "O2", 6287.0, 6312.0)
    chosen = air[(depth > 0.5) & (np.abs(air - 6298.457) > 0.1) & (np.abs(air - 6302.0) > 0.1)]
    wave, flux = np.loadtxt(SUN).T
    shifts = np.arange(-60.0, 60.0, 0.25)
    found = [np.median(np.interp(chosen * (1 + v / C_KM_S), wave, flux)) for v in shifts]
    best = shifts[int(np.argmin(found))]
    offsets = []
    for line in chosen * (1 + best / C_KM_S):
        near = np.abs(wave - line) < 0.08
        offsets.append(wave[near][np.argmin(flux[near])] - line)
    assert len(chosen) >= 10
    assert min(found) < 0.82
    assert np.median(np.abs(offsets)) < 0.006
    assert np.abs(offsets).max() < 0.020


@pytest.mark.skipif(not SUN.is_file(), reason="the solar spectrum is not beside this checkout")
def test_deeper_oxygen_lines_are_deeper_in_the_sun(telluric):
    air, depth = gas(telluric, "O2", 6287.0, 6312.0)
    use = (depth > 0.2) & (np.abs(air - 6298.457) > 0.1) & (np.abs(air - 6302.0) > 0.1)
    wave, flux = np.loadtxt(SUN).T
    shifted = air[use] * (1 - 24.5 / C_KM_S)
    seen = [1 - flux[np.abs(wave - line) < 0.05].min() for line in shifted]
    ranks = [np.argsort(np.argsort(values)) for values in (depth[use], seen)]
    assert np.corrcoef(*ranks)[0, 1] > 0.9


# Features with neither a telluric nor a predicted stellar line: as wide as solar lines are
# (0.13-0.20 A; telluric ones 0.09-0.10 A). 6276.10 is the head of the gamma band.
UNEXPLAINED = (6278.21, 6282.82, 6286.14, 6288.32, 6304.33, 6311.23)


@pytest.mark.skipif(not SUN.is_file(), reason="the solar spectrum is not beside this checkout")
def test_features_of_the_oxygen_window_have_a_telluric_or_a_stellar_line(telluric):
    """Features deeper than 2 % at 6276-6320 A; telluric shift -24.5 km/s, as found above."""
    from linewright.lines.depths import catalogue_depths
    from linewright.measure.core import measure_spectrum
    from linewright.spectra.reading import read_spectrum

    found = measure_spectrum(read_spectrum(SUN, medium="air")).features
    air = vacuum_to_air(found.wave)
    use = (air > 6276) & (air < 6320) & (found.depth > 0.02)
    stellar = load_catalogue(origins="stellar")
    depth = catalogue_depths(stellar, 5200.0, 1.1)
    star = vacuum_to_air(stellar.wave)
    sky = vacuum_to_air(telluric.wave[telluric.depth_ref > 0.01]) * (1 - 24.5 / C_KM_S)
    explained, neither = 0, []
    for line, d in zip(air[use], found.depth[use], strict=True):
        by_sky = np.min(np.abs(sky - line)) < 0.06
        by_star = np.any((np.abs(star - line) < 0.05) & (depth > 0.25 * d))
        explained += by_sky
        if not (by_sky or by_star):
            neither.append(float(line))
    assert use.sum() > 60 and explained >= 35
    for line in neither:
        assert min(abs(line - known) for known in UNEXPLAINED) < 0.03, line
    assert len(neither) <= len(UNEXPLAINED)


@pytest.mark.skipif(not SUN.is_file(), reason="the solar spectrum is not beside this checkout")
def test_head_of_the_gamma_band_stands_where_the_sun_shows_it(telluric):
    """J'' = 16 and 18 of the head, derived from the other lines of their upper levels: one dip."""
    air, depth = gas(telluric, "O2", 6276.55, 6276.68)
    assert len(air) == 2 and (depth > 0.3).all()
    wave, flux = np.loadtxt(SUN).T
    near = np.abs(wave - 6276.10) < 0.1
    dip = wave[near][np.argmin(flux[near])]
    centre = np.average(air, weights=depth) * (1 - 24.27 / C_KM_S)
    assert flux[near].min() < 0.85 and centre == pytest.approx(dip, abs=0.02)


def test_lower_energies_of_strong_oxygen_and_water_lines_are_known(telluric):
    """By optical depth; isotopic lines, whose levels are not those of 16O2, stay unknown."""
    for name, low, high in (("O2", 6275, 6330), ("O2", 7590, 7700), ("H2O", 7160, 7340)):
        mine = telluric.species == telluric.species_names.index(name)
        air = vacuum_to_air(telluric.wave)
        inside = mine & (air > low) & (air < high)
        known = inside & np.isfinite(telluric.e_low)
        assert known.sum() > 20
        assert telluric.depth_ref[known].sum() > 0.97 * telluric.depth_ref[inside].sum()


def band_transmission(telluric, low, high, step=0.002):
    """Mean transmission of O2 with pressure-broadened lines, half width 0.03 cm-1."""
    air, depth = gas(telluric, "O2", low - 20, high + 20)
    grid = np.arange(low, high, step)
    tau = np.zeros_like(grid)
    for line, peak in zip(air, depth, strict=True):
        width = 0.03 * line**2 * 1e-8
        tau += peak / (1 + ((grid - line) / width) ** 2)
    return float(np.exp(-tau).mean())


def test_oxygen_bands_within_a_factor_1_5_of_astm_g173(telluric):
    """Equivalent optical depth of 1-nm bins centred on 761 and 687 nm (vacuum in the standard
    to within the bin), air mass 1.5."""
    for centre, published in ((7610.0, 0.115), (6875.0, 0.600)):
        found = 1.0 - band_transmission(telluric, centre - 5, centre + 5)
        assert found / (1.0 - published) == pytest.approx(1.0, rel=0.5)


@pytest.mark.parametrize(
    ("low", "high"), [(5880, 6000), (6460, 6600), (7160, 7340), (8120, 8350), (9000, 9800)]
)
def test_water_where_the_literature_puts_it(telluric, low, high):
    _, depth = gas(telluric, "H2O", low, high)
    assert (depth > 0.02).sum() >= 10
