"""Damaged and hostile files: a spectrum or one line of refusal, nothing else, in 2 s."""

from __future__ import annotations

import gzip
import os
import stat
import time

import numpy as np
import pytest
from astropy.io import fits

from linewright.errors import InputRefused
from linewright.spectra.reading import read_spectrum
from linewright.spectra.spectrum import Spectrum

LIMIT_S = 2.0


def _fits_bytes(layout: str) -> bytes:
    """A small valid FITS spectrum as bytes."""
    import io

    wave = np.linspace(5000.0, 5080.0, 400)
    flux = np.random.default_rng(7).normal(1.0, 0.05, 400)
    image = fits.PrimaryHDU(flux if layout == "image" else None)
    hdus = [image]
    if layout == "image":
        image.header.update(CTYPE1="AWAV", CUNIT1="Angstrom", CRVAL1=5000.0, CDELT1=0.2,
                            CRPIX1=1.0, SPECSYS="BARYCENT", BERV=12.5)
        hdus.append(fits.ImageHDU(np.full(400, 0.05), name="ERR"))
    elif layout == "table":
        hdus.append(fits.BinTableHDU.from_columns([
            fits.Column("wave", "D", unit="nm", array=wave / 10),
            fits.Column("flux", "E", array=flux), fits.Column("ivar", "E", array=flux * 0 + 400)]))
    else:
        hdus += [fits.ImageHDU(np.array([flux] * 2), name="FLUX"),
                 fits.ImageHDU(np.array([wave, wave + 70]), name="WAVELENGTH")]
    stream = io.BytesIO()
    fits.HDUList(hdus).writeto(stream)
    return stream.getvalue()


def outcome(path) -> str:
    """'spectrum' or the refusal's line; anything else is raised."""
    start = time.perf_counter()
    try:
        result = read_spectrum(path)
    except InputRefused as refusal:
        text = str(refusal)
        assert text.startswith(str(path)) and "\n" not in text and len(text) < 400 + len(str(path))
    else:
        assert isinstance(result, Spectrum)
        for segment in result.segments:
            assert len(segment.wave) == len(segment.flux) == len(segment.mask)
            assert (np.diff(segment.wave) > 0).all() and np.isfinite(segment.wave).all()
        text = "spectrum"
    assert time.perf_counter() - start < LIMIT_S
    return text


def _damaged(data: bytes, rng: np.random.Generator) -> bytes:
    """One of: cut short, bits flipped anywhere, header characters changed, blocks swapped."""
    how, data = rng.integers(4), bytearray(data)
    if how == 0:
        return bytes(data[: rng.integers(1, len(data))])
    if how == 1:
        for at in rng.integers(0, len(data), rng.integers(1, 40)):
            data[at] ^= 1 << rng.integers(8)
    elif how == 2:
        for at in rng.integers(0, 2880, rng.integers(1, 12)):
            data[at] = rng.integers(32, 127)
    else:
        a, b = (int(i) * 2880 for i in rng.integers(0, len(data) // 2880, 2))
        data[a:a + 2880], data[b:b + 2880] = data[b:b + 2880], data[a:a + 2880]
    return bytes(data)


@pytest.mark.parametrize("layout", ["image", "table", "companion"])
def test_a_hundred_damaged_files_each(tmp_path, layout):
    data, rng = _fits_bytes(layout), np.random.default_rng(20240601)
    path = tmp_path / "damaged.fits"
    path.write_bytes(data)
    assert outcome(path) == "spectrum"
    outcomes = []
    for _ in range(100):
        path.write_bytes(_damaged(data, rng))
        outcomes.append(outcome(path))
    refused = [o for o in outcomes if o != "spectrum"]
    assert len(refused) >= 20 and len(refused) < 100


@pytest.mark.parametrize("size", [1, 80, 2879, 2880, 2881, 5000, 5760])
def test_a_truncated_file_says_so(tmp_path, size):
    path = tmp_path / "short.fits"
    path.write_bytes(_fits_bytes("image")[:size])
    assert outcome(path) != "spectrum"


def _header_edited(folder, **cards):
    data = bytearray(_fits_bytes("image"))
    header = data[:2880].decode("ascii")
    for key, value in cards.items():
        at = header.index(f"{key:<8}=")
        data[at:at + 80] = f"{key:<8}= {value:>20}".ljust(80).encode()
    path = folder / "edited.fits"
    path.write_bytes(bytes(data))
    return path


@pytest.mark.parametrize(
    ("cards", "words"),
    [
        ({"NAXIS1": "2000000000000"}, "truncated or has a false size"),
        ({"NAXIS1": "-5"}, ""),
        ({"NAXIS": "999"}, ""),
        ({"BITPIX": "13"}, ""),
        ({"CDELT1": "0.0"}, "no HDU holds a spectrum"),
        ({"CDELT1": "1E300"}, "make no sense"),
        ({"CRVAL1": "-5000.0"}, "too few|make no sense"),
    ],
)
def test_absurd_headers(tmp_path, cards, words):
    import re

    text = outcome(_header_edited(tmp_path, **cards))
    assert text != "spectrum" and re.search(words, text)


def test_folders_links_and_missing_files(tmp_path):
    assert "is a folder" in outcome(tmp_path)
    assert "no such file" in outcome(tmp_path / "none.fits")
    loop = tmp_path / "loop.fits"
    loop.symlink_to(loop)
    assert "cannot be opened" in outcome(loop)
    assert "cannot be opened" in outcome(tmp_path / ("x" * 300))


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="this system has no named pipes")
def test_a_pipe_does_not_hang(tmp_path):
    os.mkfifo(tmp_path / "pipe")
    assert "not a regular file" in outcome(tmp_path / "pipe")


def test_no_permission(tmp_path, monkeypatch):
    """Root may read everything, so the refusal of the system is imitated."""
    path = tmp_path / "secret.fits"
    path.write_bytes(_fits_bytes("image"))
    path.chmod(stat.S_IWUSR)
    if os.geteuid() == 0:
        import linewright.spectra.opening as opening

        def refused(*_):
            raise PermissionError(13, "Permission denied")

        monkeypatch.setattr(opening, "_head_and_sum", refused)
    assert "permission denied" in outcome(path)


def test_damaged_gzip(tmp_path):
    packed = gzip.compress(_fits_bytes("image"))
    for name, data in (("cut", packed[:-200]), ("flip", packed[:300] + b"\0" * 50 + packed[350:])):
        path = tmp_path / f"{name}.fits.gz"
        path.write_bytes(data)
        assert "gzip" in outcome(path)


def test_a_gzip_bomb_stops_at_the_cap(tmp_path, monkeypatch):
    import linewright.spectra.opening as opening

    monkeypatch.setattr(opening, "DECODED_CAP", 1 << 20)
    path = tmp_path / "bomb.gz"
    path.write_bytes(gzip.compress(_fits_bytes("image")[:2880] + b"\0" * (8 << 20)))
    assert "unpacks to more" in outcome(path)


@pytest.mark.parametrize(
    "data",
    [b"SIMPLE", b"SIMPLE  =                    T" + b" " * 5000, b"\x89PNG\r\n\x1a\n\0\0",
     b"XTENSION= 'IMAGE   '", b"%PDF-1.4 5000 1\n", bytes(range(256)) * 20, b"# %ECSV 1.0\n# junk",
     b"<?xml version='1.0'?><VOTABLE><RESOURCE>", b"5000 1 \xff\xfe\n" * 50],
)
def test_files_that_pretend(tmp_path, data):
    path = tmp_path / "pretender"
    path.write_bytes(data)
    assert outcome(path) != "spectrum"


def test_a_file_that_changes_while_read_is_refused(tmp_path, monkeypatch):
    import linewright.spectra.reading as reading

    path = tmp_path / "s.fits"
    path.write_bytes(_fits_bytes("table"))
    honest = reading._read_raw

    def and_touch(opened, wanted):
        raw = honest(opened, wanted)
        os.utime(path, ns=(1, 1))
        return raw

    monkeypatch.setattr(reading, "_read_raw", and_touch)
    assert "changed while it was read" in outcome(path)
