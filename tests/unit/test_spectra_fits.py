"""FITS layouts written by astropy and read back to 1e-9 in wavelength."""

from __future__ import annotations

import numpy as np
import pytest
from astropy.io import fits

from linewright.errors import InputRefused
from linewright.spectra.medium import vacuum_to_air
from linewright.spectra.reading import read_spectrum

COUNT = 400
WAVE = np.linspace(5000.0, 5080.0, COUNT)
FLUX = 1.0 - 0.5 * np.exp(-0.5 * ((WAVE - 5040.0) / 0.3) ** 2)


def _image(folder, cards, data=FLUX, extra=()):
    hdu = fits.PrimaryHDU(np.asarray(data))
    for key, value in cards.items():
        hdu.header[key] = value
    path = folder / "s.fits"
    fits.HDUList([hdu, *extra]).writeto(path)
    return path


def _linear(start=5000.0, step=80.0 / (COUNT - 1), **more):
    return {"CRVAL1": start, "CDELT1": step, "CRPIX1": 1.0, **more}


def _check(spectrum, wave=WAVE):
    assert np.allclose(spectrum.segments[0].wave, wave, rtol=1e-9)
    assert np.allclose(spectrum.segments[0].flux, FLUX, atol=1e-6)


@pytest.mark.parametrize(
    "cards",
    [
        _linear(CTYPE1="WAVE", CUNIT1="Angstrom"),
        _linear(500.0, 8.0 / (COUNT - 1), CTYPE1="WAVE", CUNIT1="nm"),
        _linear(5e-7, 8e-9 / (COUNT - 1), CTYPE1="WAVE"),
        _linear(CTYPE1="WAVELENGTH [Ang]"),
        _linear(CTYPE1="Angstrom"),
        _linear(CTYPE1="LINEAR", CUNIT1="ANGSTROMS"),
        _linear(CTYPE1="LAMBDA", CUNIT1="0.1nm"),
        _linear(CTYPE1="LINEAR", WAT1_001="wtype=linear label=Wavelength units=angstroms"),
        _linear(CUNIT1="Angstrom"),
        {"CRVAL1": 5040.0, "CD1_1": 80.0 / (COUNT - 1), "CRPIX1": 200.5, "CTYPE1": "WAVE",
         "CUNIT1": "Angstrom"},
    ],
)
def test_linear_axes(tmp_path, cards):
    _check(read_spectrum(_image(tmp_path, cards), medium="vacuum"))


def test_log_axes(tmp_path):
    """-LOG: lambda = r exp(step p / r) (FITS Paper III eq. 5); DC-FLAG: 10^w."""
    step = 0.2
    path = _image(tmp_path, _linear(5000.0, step, CTYPE1="WAVE-LOG", CUNIT1="Angstrom"))
    _check(read_spectrum(path), 5000.0 * np.exp(step * np.arange(COUNT) / 5000.0))


@pytest.mark.parametrize(
    "cards",
    [{"CRVAL1": 3.7, "CDELT1": 1e-5, "CRPIX1": 1.0, "DC-FLAG": 1, "CTYPE1": "LINEAR"},
     {"CRVAL1": 3.7, "CD1_1": 1e-5, "DC-FLAG": 1},
     {"COEFF0": 3.7, "COEFF1": 1e-5}],
)
def test_older_log_linear_keywords(tmp_path, cards):
    _check(read_spectrum(_image(tmp_path, cards)), 10 ** (3.7 + 1e-5 * np.arange(COUNT)))


def test_air_axis_and_its_medium(tmp_path):
    air = vacuum_to_air(WAVE)
    step = (air[-1] - air[0]) / (COUNT - 1)
    cards = _linear(float(air[0]), float(step), CTYPE1="AWAV", CUNIT1="Angstrom")
    spectrum = read_spectrum(_image(tmp_path, cards))
    assert spectrum.medium == "air" and "AWAV" in spectrum.medium_from
    assert spectrum.segments[0].wave[0] == pytest.approx(5000.0, rel=1e-11)


@pytest.mark.parametrize(
    ("cards", "medium", "frame"),
    [
        ({"CTYPE1": "WAVE", "CUNIT1": "Angstrom", "SPECSYS": "BARYCENT"}, "vacuum",
         "barycentric"),
        ({"CUNIT1": "Angstrom", "SPECSYS": "TOPOCENT", "VACUUM": False}, "air", "topocentric"),
        ({"CUNIT1": "Angstrom", "SPECSYS": "LSRK", "AIRORVAC": "vac"}, "vacuum", "unknown"),
        ({"CUNIT1": "Angstrom", "HELIO": True, "MEDIUM": "air"}, "air", "heliocentric"),
        ({"CUNIT1": "Angstrom"}, "unknown", "unknown"),
    ],
)
def test_medium_and_frame_keywords(tmp_path, cards, medium, frame):
    spectrum = read_spectrum(_image(tmp_path, _linear(**cards)))
    assert (spectrum.medium, spectrum.frame) == (medium, frame)


def test_a_stated_but_unapplied_correction_is_a_warning(tmp_path):
    cards = _linear(CUNIT1="Angstrom", SPECSYS="TOPOCENT", BERV=12.3)
    spectrum = read_spectrum(_image(tmp_path, cards))
    assert spectrum.corrections == ()
    assert any("+12.30 km/s (BERV): not applied" in w for w in spectrum.warnings)


def test_error_in_a_companion_image(tmp_path):
    sigma = fits.ImageHDU(np.full(COUNT, 0.02), name="ERR")
    flags = np.zeros(COUNT, np.int16)
    flags[10:13] = 1
    path = _image(tmp_path, _linear(CTYPE1="WAVE", CUNIT1="Angstrom"),
                  extra=(sigma, fits.ImageHDU(flags, name="DQ")))
    spectrum = read_spectrum(path)
    assert np.allclose(spectrum.segments[0].uncertainty, 0.02)
    assert np.flatnonzero(spectrum.segments[0].mask).tolist() == [10, 11, 12]


def test_wavelength_in_another_image_with_several_orders(tmp_path):
    waves = np.array([WAVE, WAVE + 70.0])[:, ::-1]
    hdus = fits.HDUList([fits.PrimaryHDU(), fits.ImageHDU(np.array([FLUX, FLUX])[:, ::-1],
                                                         name="FLUX"),
                         fits.ImageHDU(np.full((2, COUNT), 25.0), name="IVAR"),
                         fits.ImageHDU(waves / 10, name="WAVELENGTH")])
    hdus[3].header["BUNIT"] = "nm"
    hdus.writeto(tmp_path / "s.fits")
    spectrum = read_spectrum(tmp_path / "s.fits", medium="vacuum")
    assert len(spectrum.segments) == 2
    _check(spectrum)
    assert np.allclose(spectrum.segments[1].wave, WAVE + 70.0, rtol=1e-9)
    assert np.allclose(spectrum.segments[0].uncertainty, 0.2)
    one = read_spectrum(tmp_path / "s.fits", medium="vacuum", row=2)
    assert len(one.segments) == 1 and one.segments[0].wave[0] == pytest.approx(5070.0)


def test_rows_of_an_image_are_chosen_and_said(tmp_path):
    path = _image(tmp_path, _linear(CTYPE1="WAVE", CUNIT1="Angstrom"), np.array([FLUX, 2 * FLUX]))
    first = read_spectrum(path)
    assert any("first of 2 rows" in w for w in first.warnings)
    _check(first)
    second = read_spectrum(path, row=2)
    assert np.allclose(second.segments[0].flux, 2 * FLUX)
    assert second.read_options["row"] == 2
    with pytest.raises(InputRefused, match="no row 3"):
        read_spectrum(path, row=3)


def _table(folder, columns, cards=None, **more):
    hdu = fits.BinTableHDU.from_columns(columns)
    for key, value in (cards or {}).items():
        hdu.header[key] = value
    fits.HDUList([fits.PrimaryHDU(), *more.get("before", ()), hdu]).writeto(folder / "t.fits")
    return folder / "t.fits"


@pytest.mark.parametrize(
    ("name", "unit", "values"),
    [("WAVELENGTH", "ANGSTROMS", WAVE), ("wave", "nm", WAVE / 10), ("lambda", "um", WAVE / 1e4),
     ("loglam", None, np.log10(WAVE)), ("x", "Angstrom", WAVE), ("wavenumber", "cm-1", 1e8 / WAVE),
     ("freq", "Hz", 2.99792458e18 / WAVE), ("energy", "eV", 12398.419843320026 / WAVE)],
)
def test_a_sample_a_row(tmp_path, name, unit, values):
    path = _table(tmp_path, [fits.Column("FLUX", "D", unit="FLAM", array=FLUX),
                             fits.Column(name, "D", unit=unit, array=values)])
    spectrum = read_spectrum(path, medium="vacuum")
    _check(spectrum)
    assert spectrum.flux_unit == "FLAM"


def test_columns_by_ucd_and_utype_beat_names(tmp_path):
    path = _table(
        tmp_path,
        [fits.Column("c1", "D", array=FLUX), fits.Column("flux", "D", array=np.zeros(COUNT)),
         fits.Column("c3", "D", unit="nm", array=vacuum_to_air(WAVE) / 10)],
        {"TUTYP1": "spec:Spectrum.Data.FluxAxis.Value", "TUCD3": "em.wl;obs.atmos",
         "TUTYP3": "spec:Spectrum.Data.SpectralAxis.Value"},
    )
    spectrum = read_spectrum(path)
    _check(spectrum)
    assert spectrum.medium == "air" and "UCD" in spectrum.medium_from


def test_one_row_of_vector_cells(tmp_path):
    code = f"{COUNT}D"
    path = _table(tmp_path, [fits.Column("WAVE", code, unit="Angstrom", array=[WAVE]),
                             fits.Column("FLUX", code, array=[FLUX]),
                             fits.Column("ERR", code, array=[FLUX * 0.01])])
    spectrum = read_spectrum(path, medium="vacuum")
    _check(spectrum)
    assert "vector cells" in spectrum.layout


@pytest.mark.parametrize(("order", "segments"), [("ORDER", 2), ("NAME", 1)])
def test_several_rows_of_vector_cells(tmp_path, order, segments):
    code = f"{COUNT}D"
    path = _table(tmp_path, [fits.Column(order, "J", array=[1, 2]),
                             fits.Column("WAVE", code, unit="Angstrom", array=[WAVE, WAVE + 100]),
                             fits.Column("FLUX", code, array=[FLUX, FLUX])])
    assert len(read_spectrum(path, medium="vacuum").segments) == segments
    second = read_spectrum(path, medium="vacuum", row=2)
    assert second.segments[0].wave[0] == pytest.approx(5100.0)


def test_the_first_hdu_with_a_spectrum_is_taken(tmp_path):
    junk = fits.BinTableHDU.from_columns([fits.Column("name", "5A", array=["a", "b"])])
    path = _table(tmp_path, [fits.Column("wave", "D", unit="Angstrom", array=WAVE),
                             fits.Column("flux", "D", array=FLUX)], before=(junk,))
    spectrum = read_spectrum(path, medium="air")
    assert spectrum.read_options == {"hdu": 2, "medium": "air"}
    with pytest.raises(InputRefused):
        read_spectrum(path, hdu=1)


def test_integer_and_big_endian_data(tmp_path):
    path = _image(tmp_path, _linear(CTYPE1="WAVE", CUNIT1="Angstrom"),
                  (FLUX * 1000).astype(np.int16))
    segment = read_spectrum(path).segments[0]
    assert segment.flux.dtype == np.dtype("f8") and segment.flux.dtype.isnative
    assert np.array_equal(segment.flux, (FLUX * 1000).astype(np.int16))


@pytest.mark.parametrize(
    ("cards", "words"),
    [
        ({"CTYPE1": "km/s", "CRVAL1": -20.0, "CDELT1": 0.1}, "velocity"),
        ({"CTYPE1": "VELO", "CRVAL1": -20.0, "CDELT1": 0.1, "CUNIT1": "km/s"}, "rest wavelength"),
        ({"CTYPE1": "RA---TAN", "CRVAL1": 10.0, "CDELT1": 0.1}, "no HDU holds a spectrum"),
        ({"CRVAL1": 500.0, "CDELT1": 0.1}, "--unit"),
        ({}, "no HDU holds a spectrum"),
    ],
)
def test_images_that_are_no_spectra(tmp_path, cards, words):
    with pytest.raises(InputRefused, match=words):
        read_spectrum(_image(tmp_path, cards))


def test_a_stated_resolving_power_is_kept(tmp_path):
    cards = _linear(CTYPE1="WAVE", CUNIT1="Angstrom", SPEC_RES=47000.0, OBJECT="Polaris")
    spectrum = read_spectrum(_image(tmp_path, cards))
    assert spectrum.resolution == 47000.0 and spectrum.name == "Polaris"


def test_an_unknown_choice_is_a_programming_error(tmp_path):
    with pytest.raises(TypeError, match="colour"):
        read_spectrum(tmp_path / "x", colour="red")


def test_a_damaged_card_of_no_concern_stops_nothing(tmp_path):
    path = _image(tmp_path, _linear(CTYPE1="WAVE", CUNIT1="Angstrom", NIGHT="2020-01-01"))
    data = path.read_bytes().replace(b"NIGHT   = '2020-01-01'", b"NIGHT   = 20'20-01-01'")
    path.write_bytes(data)
    _check(read_spectrum(path))
