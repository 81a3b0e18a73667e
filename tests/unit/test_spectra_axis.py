"""Spectral axis codes against the values of the formulas of FITS Paper III."""

from __future__ import annotations

import numpy as np
import pytest
from astropy.io import fits

from linewright.spectra.axis import header_axis, velocity_to_wave
from linewright.spectra.units import guess_unit, wave_unit


def _axis(**cards):
    header = fits.Header()
    header["NAXIS"], header["NAXIS1"], header["CRPIX1"] = 1, 1001, 1.0
    for key, value in cards.items():
        header[key] = value
    axis = header_axis(header, 1001, "header")
    return axis.unit.to_angstrom(axis.values)[[0, 10, 1000]], axis


# Pixel 0, 10 and 1000 of one-dimensional headers, as wcslib gives them (astropy 8.0.2),
# following Greisen, Calabretta, Valdes & Allen 2006, A&A 446, 747; here in Angstrom.
CODES = (
    ("WAVE", {"CRVAL1": 5e-7, "CDELT1": 1e-10}, (5000.0, 5010.0, 6000.0), 1e-12),
    ("WAVE-LOG", {"CRVAL1": 5000.0, "CDELT1": 1.0, "CUNIT1": "Angstrom"},
     (5000.0, 5010.010007, 6107.013791), 1e-9),
    ("AWAV-LOG", {"CRVAL1": 5000.0, "CDELT1": 1.0, "CUNIT1": "Angstrom"},
     (5000.0, 5010.010007, 6107.013791), 1e-9),
    ("WAVE-F2W", {"CRVAL1": 5e-7, "CDELT1": 1e-10}, (5000.0, 5010.02004, 6250.0), 1e-9),
    ("AWAV-V2A", {"CRVAL1": 5e-7, "CDELT1": 1e-10, "RESTWAV": 5e-7},
     (5000.0, 5010.010025, 6123.791999), 1e-9),
    ("WAVE-GRI", {"CRVAL1": 5e-7, "CDELT1": 1e-10, "PV1_0": 3e5, "PV1_1": 1.0, "PV1_2": 20.0},
     (5000.0, 5010.000299, 6002.521575), 1e-9),
)


@pytest.mark.parametrize(("code", "cards", "expected", "tolerance"), CODES,
                         ids=[c[0] for c in CODES])
def test_wavelength_codes(code, cards, expected, tolerance):
    wave, axis = _axis(CTYPE1=code, **cards)
    assert wave == pytest.approx(expected, rel=tolerance)
    assert axis.medium == ("air" if code.startswith("AWAV") else "vacuum")


def test_frequency_and_its_wavelength_sampling():
    """FREQ-W2F from 6e14 Hz in steps of 1e11 Hz: 6.010016694e14 and 7.2e14 Hz (wcslib)."""
    wave, axis = _axis(CTYPE1="FREQ-W2F", CRVAL1=6e14, CDELT1=1e11)
    assert 2.99792458e18 / wave == pytest.approx((6e14, 6.010016694e14, 7.2e14), rel=1e-9)
    assert axis.medium == "vacuum"
    wave, _ = _axis(CTYPE1="FREQ", CRVAL1=6e14, CDELT1=1e11)
    assert 2.99792458e18 / wave == pytest.approx((6e14, 6.01e14, 7e14), rel=1e-12)


def test_velocity_sampled_in_frequency():
    """VELO-F2V, rest 5.99584916e14 Hz, 1 km/s: 10000.16678 and 1001667.811 m/s (wcslib)."""
    wave, _ = _axis(CTYPE1="VELO-F2V", CRVAL1=0.0, CDELT1=1000.0, RESTFRQ=5.99584916e14)
    beta = np.array([0.0, 10000.16678, 1001667.811]) / 299792458.0
    rest = 2.99792458e18 / 5.99584916e14
    assert wave == pytest.approx(rest * np.sqrt((1 + beta) / (1 - beta)), rel=1e-9)


# One wavelength in three velocity conventions, rest 6562.819 (reference: the doppler_*
# equivalencies of astropy.units, which follow Paper III): km/s optical, radio, relativistic.
CONVENTIONS = (
    (6552.819, -456.8044, -457.5015, -457.1524), (6572.819, 456.8044, 456.1094, 456.4564),
    (6600.0, 1698.4444, 1688.8763, 1693.6333), (7000.0, 19970.6203, 18723.3667, 19306.8315),
    (13125.638, 299792.4580, 149896.2290, 179875.4748),
)


@pytest.mark.parametrize(("wave", "optical", "radio", "relativistic"), CONVENTIONS)
def test_velocity_conventions(wave, optical, radio, relativistic):
    for kind, value in (("VOPT", optical), ("VRAD", radio), ("VELO", relativistic)):
        got = velocity_to_wave(kind, value * 1e3, 6562.819)
        assert float(got) == pytest.approx(wave, rel=1e-8)
    assert float(velocity_to_wave("ZOPT", optical / 299792.458, 6562.819)) == pytest.approx(wave)


def test_a_lookup_table_axis(tmp_path):
    """-TAB with 4000, 4001, 4003, 4007 A: pixels 0, 1, 1.5, 3 are 4000, 4001, 4002, 4007 A."""
    from linewright.spectra.reading import read_spectrum

    table = np.concatenate(([4000.0, 4001.0, 4003.0, 4007.0], 4010.0 + np.arange(16.0)))
    column = fits.Column("COORDS", "20D", unit="Angstrom", dim="(1,20)",
                         array=table.reshape(1, 20, 1))
    hdu = fits.PrimaryHDU(np.arange(1.0, 21.0))
    for key, value in {"CTYPE1": "WAVE-TAB", "CUNIT1": "Angstrom", "CRPIX1": 1.0, "CRVAL1": 1.0,
                       "CDELT1": 1.0, "PS1_0": "WCS-TAB", "PS1_1": "COORDS", "PV1_1": 1,
                       "PV1_2": 1, "PV1_3": 1}.items():
        hdu.header[key] = value
    extension = fits.BinTableHDU.from_columns([column], name="WCS-TAB")
    fits.HDUList([hdu, extension]).writeto(tmp_path / "tab.fits")
    spectrum = read_spectrum(tmp_path / "tab.fits")
    assert spectrum.medium == "vacuum"
    assert np.allclose(spectrum.segments[0].wave, table, rtol=1e-9)


@pytest.mark.parametrize(
    ("text", "value", "angstrom"),
    [("ANGSTROMS", 5000.0, 5000.0), ("0.1nm", 5000.0, 5000.0), ("Å", 5000.0, 5000.0),
     ("AA", 5000.0, 5000.0), ("nm", 500.0, 5000.0), ("microns", 0.5, 5000.0),
     ("10**-10 m", 5000.0, 5000.0), ("m", 5e-7, 5000.0), ("cm-1", 20000.0, 5000.0),
     ("GHz", 599584.916, 5000.0), ("keV", 12.398419843320026, 1.0), ("[nm]", 500.0, 5000.0),
     ("Wavelength (Ang)", 5000.0, 5000.0), ("log10(Angstrom)", 4.0, 1e4)],
)
def test_unit_spellings(text, value, angstrom):
    assert float(wave_unit(text).to_angstrom(np.array(value))) == pytest.approx(angstrom, rel=1e-9)


@pytest.mark.parametrize("text", ["", "km/s", "ADU", "erg/s/cm2/A", "FLAM", "counts", "pix"])
def test_what_is_no_wavelength_unit(text):
    assert wave_unit(text) is None


def test_guessing_stops_where_it_would_be_silent():
    assert guess_unit(np.array([4000.0, 5000.0]), "x")[1].startswith("wavelength unit not stated")
