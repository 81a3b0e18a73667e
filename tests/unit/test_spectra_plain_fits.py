"""Plain FITS images read without a library: the same as through astropy, or left to it."""

from __future__ import annotations

import subprocess
import sys
from dataclasses import fields
from pathlib import Path

import numpy as np
import pytest
from astropy.io import fits

from linewright.spectra import plain_fits, reading
from linewright.spectra.opening import open_checked
from linewright.spectra.raw import Wanted

PUBLIC = Path(__file__).resolve().parents[2].parent / "shared" / "spectra"
WANTED = Wanted(None, None, None, None)


def written(tmp_path, flux=None, **cards) -> Path:
    flux = np.linspace(1.0, 2.0, 500).astype("f4") if flux is None else flux
    hdu = fits.PrimaryHDU(flux)
    hdu.header.update({"CTYPE1": "AWAV", "CUNIT1": "Angstrom", "CRVAL1": 5000.0,
                       "CDELT1": 0.02, "CRPIX1": 1.0, "OBJECT": "O'Neill's star",
                       "BUNIT": "erg/s/cm2/A", **cards})
    hdu.header["COMMENT"] = "free text"
    hdu.header["HIERARCH ABC DEF GHI"] = (1.5e-3, "a long name")
    path = tmp_path / "plain.fits"
    hdu.writeto(path)
    return path


def both(path, monkeypatch):
    """(read plainly, read through astropy) whole spectra."""
    plain = reading.read_spectrum(path)
    monkeypatch.setattr(plain_fits, "read_plain", lambda opened, wanted: None)
    return plain, reading.read_spectrum(path)


def assert_same(one, other) -> None:
    for field in (f.name for f in fields(one) if f.name != "segments"):
        assert repr(getattr(one, field)) == repr(getattr(other, field)), field
    for a, b in zip(one.segments, other.segments, strict=True):
        assert np.array_equal(a.wave, b.wave) and np.array_equal(a.flux, b.flux, equal_nan=True)
        assert np.array_equal(a.mask, b.mask)


@pytest.mark.parametrize("cards", [
    {}, {"CTYPE1": "WAVE", "CUNIT1": "nm", "CRVAL1": 500.0, "CDELT1": 1e-3},
    {"CTYPE1": "WAVE-LOG"}, {"CTYPE1": "", "DC-FLAG": 1, "CRVAL1": 3.7, "CDELT1": 1e-5},
    {"SPECSYS": "BARYCENT"}, {"BUNIT": "Flux (ADU)"},
])
def test_the_same_as_through_the_library(tmp_path, monkeypatch, cards):
    path = written(tmp_path, **cards)
    assert plain_fits.read_plain(open_checked(path), WANTED) is not None
    assert_same(*both(path, monkeypatch))


def test_every_statement_of_the_header_is_kept(tmp_path):
    path = written(tmp_path)
    cards = plain_fits.read_plain(open_checked(path), WANTED).cards
    header = fits.getheader(path)
    assert [(c.key, c.value, c.comment) for c in cards] == [
        (c.keyword, c.value, c.comment) for c in header.cards]


@pytest.mark.skipif(not (PUBLIC / "mdwarf_r115000_s1d.fits").exists(),
                    reason="the public spectra are not beside the checkout")
@pytest.mark.parametrize("name", ["mdwarf_r115000_s1d.fits", "ttauri_r40000_blue.fits"])
def test_real_files_the_same(name, monkeypatch):
    assert_same(*both(PUBLIC / name, monkeypatch))


@pytest.mark.parametrize("make", [
    lambda p: written(p, flux=np.ones((2, 300))),
    lambda p: written(p, CTYPE1="WAVE-F2W"),
    lambda p: written(p, LONGTEXT="x" * 90),
    lambda p: written(p, EMPTY=None),
    lambda p: written(p, flux=np.arange(500, dtype=np.uint16)),
])
def test_what_is_not_plain_is_left_to_the_library(tmp_path, make):
    assert plain_fits.read_plain(open_checked(make(tmp_path)), WANTED) is None


def test_a_truncated_file_is_left_to_the_library(tmp_path):
    path = written(tmp_path)
    path.write_bytes(path.read_bytes()[:-2880])
    assert plain_fits.read_plain(open_checked(path), WANTED) is None


def test_no_library_is_loaded(tmp_path):
    path = written(tmp_path)
    code = ("import sys; from linewright import read_spectrum; read_spectrum(sys.argv[1]); "
            "assert not any(m.split('.')[0] in ('astropy', 'scipy') for m in sys.modules)")
    subprocess.run([sys.executable, "-c", code, str(path)], check=True)
