"""Temperatures against published values and laws."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from star_simulation import Star, simulate
from truths import SPECTRA

from linewright.claims.colour import planck_colour, wien_colour
from linewright.claims.readings import BALANCE, GROWTH, PLANCK, PROFILE, WIEN
from linewright.job.options import SolveOptions
from linewright.job.solve import solve
from linewright.job.temperatures import colour_readings
from linewright.lines.levels import saha_ratio_log
from linewright.lines.loading import load_catalogue
from linewright.measure.core import measure_spectrum
from linewright.resources import samples_dir
from linewright.session.summary import summary
from linewright.spectra.reading import read_spectrum

WAVE = np.linspace(4000.0, 9500.0, 80)


@pytest.mark.parametrize("temperature", [3500.0, 5772.0, 10_000.0, 30_000.0])
def test_planck_colour_of_a_black_body(temperature):
    """Planck's law in its textbook form with CODATA 2022 constants, from astropy."""
    u = pytest.importorskip("astropy.units")
    from astropy.modeling.physical_models import BlackBody

    shape = BlackBody(temperature * u.K, scale=1.0 * u.Unit("erg / (s cm2 AA sr)"))
    fit = planck_colour(WAVE, shape(WAVE * u.AA).value)
    assert fit.temperature == pytest.approx(temperature, rel=1e-4)
    assert fit.error < 1e-3 * temperature


def test_black_body_of_5772_k_peaks_where_wiens_displacement_law_says():
    """lambda T = 2897.771955 um K (CODATA 2022); 5772 K: IAU 2015 Resolution B3. A fit to
    the flux about that peak gives the temperature back."""
    peak = 2897.771955e4 / 5772.0  # Angstrom
    wave = peak * np.linspace(0.8, 1.6, 2001)
    law = wave**-5 / np.expm1(1.438776877e8 / (wave * 5772.0))
    assert wave[np.argmax(law)] == pytest.approx(peak, rel=1e-3)
    assert planck_colour(wave, law).temperature == pytest.approx(5772.0, rel=1e-4)


def test_wien_colour_is_exact_for_wiens_law_and_low_for_plancks():
    wien = WAVE**-5 * np.exp(-1.438776877e8 / (WAVE * 6000.0))
    assert wien_colour(WAVE, wien).temperature == pytest.approx(6000.0, rel=1e-6)
    planck = WAVE**-5 / np.expm1(1.438776877e8 / (WAVE * 6000.0))
    assert 5700.0 < wien_colour(WAVE, planck).temperature < 6000.0


def test_no_black_body_rises_faster_than_the_rayleigh_jeans_law():
    assert planck_colour(WAVE, WAVE**-4.6) is None
    assert wien_colour(WAVE, WAVE**-5.2) is None
    assert planck_colour(WAVE[:5], WAVE[:5]) is None


def test_saha_of_the_suns_calcium():
    """Carroll & Ostlie, An Introduction to Modern Astrophysics, 2nd ed., example 8.1.5: at
    5777 K and 1.5 N m-2 Ca II/Ca I = 918 with U = 2.30/1.32 and 6.11 eV."""
    found = saha_ratio_log(np.log10(2.30 / 1.32), 6.11, 5777.0, np.log10(15.0))
    assert found == pytest.approx(np.log10(918.0), abs=0.002)


def test_saha_of_the_suns_hydrogen():
    """The same, H II/H I = 7.7e-5 with U = 1/2 and 13.6 eV."""
    found = saha_ratio_log(np.log10(1 / 2), 13.6, 5777.0, np.log10(15.0))
    assert found == pytest.approx(np.log10(7.7e-5), abs=0.005)


@pytest.mark.parametrize(
    ("low", "high", "truth"), [(4000.0, 7000.0, 16_600.0), (5000.0, 9500.0, 13_900.0)]
)
def test_vegas_continuum_has_the_colour_of_a_hotter_black_body(low, high, truth):
    """An A0 star's Paschen continuum: 16,600 K from 4000-7000 A, 13,900 K from 5000-9500 A by
    another fit to the same file (CALSPEC, Bohlin 2007), its effective temperature 9,600 K."""
    sedpy = pytest.importorskip("sedpy", reason="the package with the spectrum of Vega is absent")
    path = next(Path(sedpy.__file__).parent.rglob("alpha_lyr_stis_011.fits"))
    measured = measure_spectrum(read_spectrum(path)).segments[0]
    inside = (measured.node_wave > low) & (measured.node_wave < high)
    columns = (measured.node_wave, measured.node_flux, measured.node_err)
    fit = planck_colour(*(column[inside] for column in columns))
    assert abs(fit.temperature - truth) < 2 * fit.error
    assert fit.temperature > 9600.0


def test_colour_is_read_only_where_the_flux_is_a_flux_density():
    star = read_spectrum(samples_dir() / "g_dwarf.fits")
    assert star.flux_unit == ""
    assert colour_readings(star, None) == ()


@pytest.mark.skipif(not SPECTRA.exists(), reason="the shared spectra are absent")
def test_a_survey_star_shows_both_colours_apart_from_the_lines():
    """A G1V star: effective temperature about 5,900 K (common practice, no source)."""
    star = read_spectrum(SPECTRA / "gdwarf_r2000_18hdu.fits")
    read = {r.label: r for r in colour_readings(star, measure_spectrum(star))}
    assert set(read) == {PLANCK, WIEN}
    assert not any(r.used for r in read.values())
    assert abs(read[PLANCK].value - 5900.0) < 2 * read[PLANCK].error
    assert read[WIEN].value < read[PLANCK].value


# Layers of the quiet Sun's model C, temperature (K) and electron density (cm-3): Fontenla,
# Avrett & Loeser 1993, ApJ 406, 319, as carried by lightweaver 0.17.0.
SUN_T = (4880.0, 4990.0, 5060.0, 5150.0, 5270.0, 5410.0, 5580.0, 5790.0)
SUN_NE = (2.557e12, 3.881e12, 4.803e12, 5.985e12, 7.585e12, 9.816e12, 1.329e13, 1.951e13)


def suns_log_pe(temperature):
    """log10 electron pressure (dyn cm-2) of the model's layer at a temperature in K."""
    pressure = np.log10(np.array(SUN_NE) * 1.380649e-16 * np.array(SUN_T))
    return np.interp(temperature, SUN_T, pressure)


@pytest.fixture(scope="module")
def solved_sun():
    if not SPECTRA.exists():
        pytest.skip("the shared spectra are absent")
    sun = read_spectrum(SPECTRA / "sun_r47000.txt", medium="air")
    return {ranges: solve(sun, options=SolveOptions(ranges=ranges)) for ranges in (
        (), ((5100.0, 5250.0), (6100.0, 6250.0)))}  # fmt: skip


def test_the_suns_electron_pressure_is_that_of_the_layer_its_lines_form_in(solved_sun):
    """One layer at the excitation temperature, hence less than the 1.18 of 5,777 K (Carroll &
    Ostlie, example 8.1.5), which the model has there too."""
    assert suns_log_pe(5777.0) == pytest.approx(1.18, abs=0.02)
    for session in solved_sun.values():
        read = {r.label: r for r in session.temperatures}
        truth = suns_log_pe(read["adopted"].value)
        assert abs(read[BALANCE].value - truth) < 2 * read[BALANCE].error
        assert read[BALANCE].error < 0.3


def test_a_short_stretch_of_the_sun_agrees_with_all_of_it_within_its_error(solved_sun):
    """Two windows of 150 A against 1,900 A: they agree, and the shorter is the less sure."""
    whole, short = (session.temperatures[0] for session in solved_sun.values())
    assert abs(short.value - whole.value) < 2 * short.error
    assert short.error > whole.error


def test_the_suns_excitation_temperature(solved_sun):
    """5,201 +- 36 K by a regression of the same form on this spectrum (prototype, other line
    selection); curves of growth give 5,040-5,200 K (theta 0.97-1.00: from memory)."""
    session = solved_sun[()]
    adopted = session.temperatures[0]
    assert session.temperature_k == pytest.approx(adopted.value, abs=0.5)
    assert abs(adopted.value - 5201.0) < 2 * np.hypot(adopted.error, 36.0)
    assert adopted.error < 300.0
    text = summary(session)
    assert f"excitation temperature {session.temperature_k:.0f} +- {adopted.error:.0f} K" in text
    assert "  likelihood profile" in text


STAR = Star(5800.0, vsini=15.0, pressure=-0.3, low=4900.0, high=5250.0, seed=11)


@pytest.fixture(scope="module")
def star():
    """(Spectrum, the engine's catalogue)"""
    return simulate(STAR, load_catalogue())


def test_a_simulated_star_is_read_within_its_errors(star):
    spectrum, kept = star
    read = {r.label: r for r in solve(spectrum, kept).temperatures}
    assert read["adopted"].value == pytest.approx(5800.0, abs=300.0)
    assert abs(read["adopted"].value - 5800.0) < 2.5 * read["adopted"].error
    assert abs(read[PROFILE].value - 5800.0) < 2.5 * read[PROFILE].error
    assert abs(read[BALANCE].value - (1.2 - 0.3)) < 2.5 * read[BALANCE].error


@pytest.mark.parametrize("given", [3000.0, 8800.0])
def test_a_given_temperature_stands_and_the_lines_still_speak(star, given):
    """Claims made 2,800 and 3,000 K off: the curve of growth comes within 300 K (first goal)."""
    spectrum, kept = star
    session = solve(spectrum, kept, SolveOptions(temperature=given))
    read = {r.label: r for r in session.temperatures}
    assert session.temperature_k == given == read["given"].value
    assert not read[GROWTH].used
    assert abs(read[GROWTH].value - 5800.0) < 300.0
    assert abs(read[GROWTH].value - 5800.0) < 2 * read[GROWTH].error
