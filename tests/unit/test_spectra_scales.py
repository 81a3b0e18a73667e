"""Start and step instead of wavelengths; truncated HDUs; orders in long tables; cubes."""

from __future__ import annotations

import numpy as np
import pytest
from astropy.io import fits

from linewright.errors import InputRefused
from linewright.spectra.reading import read_spectrum

COUNT = 300
FLUX = 1.0 + 0.1 * np.sin(np.arange(COUNT))


def _table(path, columns, **cards):
    hdu = fits.BinTableHDU.from_columns(columns)
    hdu.header.update(cards)
    fits.HDUList([fits.PrimaryHDU(), hdu]).writeto(path)
    return path


@pytest.mark.parametrize(("start", "step"), [
    ("CRVAL1", "CDELT1"), ("W0", "DW"), ("WAVE_START", "WAVE_STEP"), ("lambda0", "dlambda"),
    ("start_wave", "dispersion")])
def test_scalar_start_and_step_beside_vector_cells(tmp_path, start, step):
    path = _table(tmp_path / "s.fits", [
        fits.Column("FLUX", f"{COUNT}D", array=[FLUX, FLUX + 1]),
        fits.Column(start, "D", unit="nm", array=[500.0, 510.0]),
        fits.Column(step, "D", unit="nm", array=[0.01, 0.02])])
    spectrum = read_spectrum(path, medium="vacuum")
    assert np.allclose(spectrum.segments[0].wave, 5000 + 0.1 * np.arange(COUNT), rtol=1e-12)
    assert any("computed from" in w for w in spectrum.warnings)
    second = read_spectrum(path, medium="vacuum", row=2)
    assert np.allclose(second.segments[0].wave, 5100 + 0.2 * np.arange(COUNT), rtol=1e-12)
    assert np.allclose(second.segments[0].flux, FLUX + 1)


def test_log_coefficients_in_columns(tmp_path):
    path = _table(tmp_path / "s.fits", [
        fits.Column("FLUX", f"{COUNT}D", array=[FLUX]), fits.Column("COEFF0", "D", array=[3.7]),
        fits.Column("COEFF1", "D", array=[1e-4])])
    wave = read_spectrum(path, medium="vacuum").segments[0].wave
    assert np.allclose(wave, 10 ** (3.7 + 1e-4 * np.arange(COUNT)), rtol=1e-12)


def test_axis_keywords_in_a_table_header(tmp_path):
    path = _table(tmp_path / "s.fits", [fits.Column("FLUX", "D", array=FLUX)],
                  CRVAL1=5000.0, CDELT1=0.1, CRPIX1=11.0, CUNIT1="Angstrom")
    wave = read_spectrum(path, medium="vacuum").segments[0].wave
    assert np.allclose(wave, 5000 + 0.1 * (np.arange(COUNT) - 10), rtol=1e-12)


def test_a_wavelength_column_wins_over_a_scale(tmp_path):
    wave = 6000 + 0.3 * np.arange(COUNT)
    path = _table(tmp_path / "s.fits", [
        fits.Column("WAVE", "D", unit="Angstrom", array=wave),
        fits.Column("FLUX", "D", array=FLUX)], CRVAL1=1.0, CDELT1=1.0)
    assert np.allclose(read_spectrum(path).segments[0].wave, wave)


def test_a_truncated_later_hdu_is_left_out_and_said(tmp_path):
    hdu = fits.PrimaryHDU(FLUX)
    hdu.header.update(CTYPE1="WAVE", CUNIT1="Angstrom", CRVAL1=5000.0, CDELT1=0.1, CRPIX1=1.0)
    path = tmp_path / "s.fits"
    fits.HDUList([hdu, fits.ImageHDU(FLUX * 0 + 0.1, name="ERR")]).writeto(path)
    path.write_bytes(path.read_bytes()[:-2880])
    spectrum = read_spectrum(path)
    assert spectrum.samples == COUNT and spectrum.segments[0].uncertainty is None
    assert "HDU 1 is truncated and was left out" in spectrum.warnings
    with pytest.raises(InputRefused, match="truncated"):
        read_spectrum(path, hdu=1)


def test_orders_numbered_in_a_long_table(tmp_path):
    order = np.repeat([7, 8], COUNT // 2)
    wave = np.concatenate([5000 + 0.1 * np.arange(COUNT // 2), 5010 + 0.1 * np.arange(COUNT // 2)])
    path = _table(tmp_path / "s.fits", [
        fits.Column("WAVE", "D", unit="Angstrom", array=wave),
        fits.Column("FLUX", "D", array=FLUX), fits.Column("ORDER", "J", array=order)])
    spectrum = read_spectrum(path)
    assert [len(s.wave) for s in spectrum.segments] == [COUNT // 2] * 2
    assert [round(float(s.wave[0]), 3) for s in spectrum.segments] == [5000.0, 5010.0]


def test_a_cube_is_refused_with_the_reason(tmp_path):
    hdu = fits.PrimaryHDU(np.ones((50, 4, 4)))
    hdu.header.update(CTYPE1="RA---TAN", CTYPE2="DEC--TAN", CTYPE3="AWAV", CRVAL3=5000.0,
                      CDELT3=1.0, CUNIT3="Angstrom")
    hdu.writeto(tmp_path / "c.fits")
    with pytest.raises(InputRefused, match="wavelengths along axis 3; extract"):
        read_spectrum(tmp_path / "c.fits")
