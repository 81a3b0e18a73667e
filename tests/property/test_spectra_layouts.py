"""Every layout written by this script and read back to 1e-9 in wavelength."""

from __future__ import annotations

import bz2
import gzip
import io

import numpy as np
import pytest
from astropy.io import fits
from astropy.table import Table
from hypothesis import given, settings
from hypothesis import strategies as st

from linewright.spectra.medium import air_to_vacuum
from linewright.spectra.reading import read_spectrum

C_A, HC_J = 2.99792458e18, 6.62607015e-34 * 2.99792458e8


def _hdus(*hdus) -> bytes:
    stream = io.BytesIO()
    fits.HDUList([fits.PrimaryHDU(), *hdus] if not isinstance(hdus[0], fits.PrimaryHDU)
                 else list(hdus)).writeto(stream)
    return stream.getvalue()


def _axis(flux, **cards) -> bytes:
    hdu = fits.PrimaryHDU(flux)
    hdu.header.update({"CRPIX1": 1.0, **cards})
    return _hdus(hdu)


def _columns(**columns) -> bytes:
    made = []
    for name, (array, unit) in columns.items():
        array = np.asarray(array, float)
        code = "D" if array.ndim == 1 else f"{array.shape[1]}D"
        made.append(fits.Column(name, code, unit=unit, array=array))
    return _hdus(fits.BinTableHDU.from_columns(made))


def _astropy(wave, flux, form) -> bytes:
    table, stream = Table({"wave": wave, "flux": flux}), io.BytesIO()
    table["wave"].unit = "nm"
    if form == "votable":
        table["wave"] = np.asarray(wave)
        table["wave"].unit = "nm"
        table.write(stream, format="votable")
        return stream.getvalue()
    text = io.StringIO()
    table.write(text, format="ascii.ecsv")
    return text.getvalue().encode()


def _line(values) -> tuple[float, float]:
    return float(values[0]), float((values[-1] - values[0]) / (len(values) - 1))


def _linear(kind, values, flux, **more):
    start, step = _line(values)
    return _axis(flux, CTYPE1=kind, CRVAL1=start, CDELT1=step, **more), (
        start + step * np.arange(len(flux)))


def frequency(wave, flux):
    data, nu = _linear("FREQ", C_A / wave, flux)
    return data, C_A / nu


def wavenumber(wave, flux):
    data, k = _linear("WAVN", 1e10 / wave, flux)
    return data, 1e10 / k


def energy(wave, flux):
    data, e = _linear("ENER", HC_J / (wave * 1e-10), flux)
    return data, 1e10 * HC_J / e


def velocity(wave, flux):
    rest = float(wave[len(wave) // 2])
    data, v = _linear("VOPT", 299792458.0 * (wave / rest - 1), flux, RESTWAV=rest * 1e-10)
    return data, rest * (1 + v / 299792458.0)


def log_image(wave, flux):
    step = float((wave[1] - wave[0]))
    data = _axis(flux, CTYPE1="WAVE-LOG", CUNIT1="Angstrom", CRVAL1=float(wave[0]), CDELT1=step)
    return data, wave[0] * np.exp(step * np.arange(len(wave)) / wave[0])


def older_log(wave, flux):
    start, step = _line(np.log10(wave))
    data = _axis(flux, CRVAL1=start, CD1_1=step, **{"DC-FLAG": 1, "CTYPE1": "LINEAR"})
    return data, 10 ** (start + step * np.arange(len(wave)))


def lookup(wave, flux):
    size = len(wave)
    hdu = fits.PrimaryHDU(flux)
    hdu.header.update({"CTYPE1": "WAVE-TAB", "CUNIT1": "Angstrom", "CRPIX1": 1.0, "CRVAL1": 1.0,
                       "CDELT1": 1.0, "PS1_0": "WCS-TAB", "PS1_1": "COORDS", "PV1_1": 1,
                       "PV1_2": 1, "PV1_3": 1})
    column = fits.Column("COORDS", f"{size}D", unit="Angstrom", dim=f"(1,{size})",
                         array=wave.reshape(1, size, 1))
    return _hdus(hdu, fits.BinTableHDU.from_columns([column], name="WCS-TAB")), wave


def companion(wave, flux):
    return _hdus(fits.ImageHDU(flux, name="FLUX"), fits.ImageHDU(wave, name="WAVE")), wave


def log_column(wave, flux):
    return _columns(loglam=(np.log10(wave), ""), flux=(flux, "")), wave


def metre_column(wave, flux):
    return _columns(WAVE=(wave * 1e-10, "m"), FLUX=(flux, "")), wave


def kayser_column(wave, flux):
    return _columns(WAVENUMBER=(1e8 / wave, "cm-1"), FLUX=(flux, "")), wave


def cells(wave, flux):
    return _columns(WAVE=([wave], "Angstrom"), FLUX=([flux], "")), wave


def scale(wave, flux):
    start, step = _line(wave)
    data = _columns(FLUX=([flux], ""), W0=([start], "Angstrom"), DW=([step], "Angstrom"))
    return data, start + step * np.arange(len(wave))


def descending(wave, flux):
    return _columns(WAVE=(wave[::-1], "Angstrom"), FLUX=(flux[::-1], "")), wave


def votable(wave, flux):
    return _astropy(wave / 10, flux, "votable"), wave


def ecsv(wave, flux):
    return _astropy(wave / 10, flux, "ecsv"), wave


def text(wave, flux):
    rows = [f"{w:.17g}\t{f:.17g}" for w, f in zip(wave, flux, strict=True)]
    return "\n".join(["! a comment", *rows]).encode(), wave


def commas(wave, flux):
    rows = [f"{w / 10:.17g},{f:.17g}" for w, f in zip(wave, flux, strict=True)]
    return "\n".join(["wavelength_nm,flux", *rows]).encode(), wave


def zipped(wave, flux):
    data, wave = lookup(wave, flux)
    return gzip.compress(data), wave


def packed(wave, flux):
    data, wave = cells(wave, flux)
    return bz2.compress(data), wave


LAYOUTS = (frequency, wavenumber, energy, velocity, log_image, older_log, lookup, companion,
           log_column, metre_column, kayser_column, cells, scale, descending, votable, ecsv, text,
           commas, zipped, packed)


@pytest.mark.parametrize("layout", LAYOUTS, ids=[f.__name__ for f in LAYOUTS])
@settings(max_examples=12, deadline=None)
@given(start=st.floats(2500.0, 20000.0), step=st.floats(0.005, 0.5), count=st.integers(30, 200),
       seed=st.integers(0, 2**31), air=st.booleans())
@pytest.mark.filterwarnings("ignore::Warning")
def test_layout_round_trip(tmp_path_factory, layout, start, step, count, seed, air):
    wave = start + step * np.arange(count)
    flux = np.random.default_rng(seed).normal(1.0, 0.1, count)
    data, meant = layout(wave, flux)
    path = tmp_path_factory.mktemp("layout") / "spectrum"
    path.write_bytes(data)
    natural = layout in (frequency, wavenumber, energy, velocity, log_image, lookup, zipped,
                         kayser_column)
    medium = "vacuum" if natural or not air else "air"
    found = read_spectrum(path, medium=medium).segments[0]
    expected = np.sort(air_to_vacuum(meant) if medium == "air" else meant)
    assert np.allclose(found.wave, expected, rtol=1e-9, atol=0)
    ordered = flux if meant[0] < meant[-1] else flux[::-1]
    assert np.allclose(found.flux, ordered, rtol=1e-9)
