"""Makers of hostile files: damaged copies of good spectra, impossible headers, no spectra.

Every maker takes a random generator and gives the bytes of a file. ``outcome`` opens one and
fails on anything but a Spectrum or a one-line refusal within the limit.
"""

from __future__ import annotations

import bz2
import gzip
import io
import time

import numpy as np
from astropy.io import fits

from linewright.errors import InputRefused
from linewright.spectra.reading import read_spectrum
from linewright.spectra.spectrum import Spectrum

LIMIT_S = 2.0
COUNT = 400
WAVE = np.linspace(5000.0, 5080.0, COUNT)
FLUX = np.random.default_rng(7).normal(1.0, 0.05, COUNT)


def _written(hdus) -> bytes:
    stream = io.BytesIO()
    fits.HDUList(hdus).writeto(stream)
    return stream.getvalue()


def image() -> bytes:
    hdu = fits.PrimaryHDU(FLUX)
    hdu.header.update(CTYPE1="AWAV", CUNIT1="Angstrom", CRVAL1=5000.0, CDELT1=0.2, CRPIX1=1.0,
                      SPECSYS="BARYCENT", BERV=12.5)
    return _written([hdu, fits.ImageHDU(np.full(COUNT, 0.05), name="ERR")])


def table() -> bytes:
    return _written([fits.PrimaryHDU(), fits.BinTableHDU.from_columns([
        fits.Column("wave", "D", unit="nm", array=WAVE / 10),
        fits.Column("flux", "E", array=FLUX), fits.Column("ivar", "E", array=FLUX * 0 + 400)])])


def companions() -> bytes:
    return _written([fits.PrimaryHDU(), fits.ImageHDU(np.array([FLUX] * 2), name="FLUX"),
                     fits.ImageHDU(np.array([WAVE, WAVE + 70]), name="WAVELENGTH")])


def cells() -> bytes:
    return _written([fits.PrimaryHDU(), fits.BinTableHDU.from_columns([
        fits.Column("WAVE", f"{COUNT}D", unit="Angstrom", array=[WAVE]),
        fits.Column("FLUX", f"{COUNT}E", array=[FLUX])])])


def lookup() -> bytes:
    hdu = fits.PrimaryHDU(FLUX)
    hdu.header.update({"CTYPE1": "WAVE-TAB", "CUNIT1": "Angstrom", "CRPIX1": 1.0, "CRVAL1": 1.0,
                       "CDELT1": 1.0, "PS1_0": "WCS-TAB", "PS1_1": "COORDS", "PV1_1": 1,
                       "PV1_2": 1, "PV1_3": 1})
    column = fits.Column("COORDS", f"{COUNT}D", unit="Angstrom", dim=f"(1,{COUNT})",
                         array=WAVE.reshape(1, COUNT, 1))
    return _written([hdu, fits.BinTableHDU.from_columns([column], name="WCS-TAB")])


def text() -> bytes:
    rows = "".join(f"{w:.3f} {f:.5f} 0.05\n" for w, f in zip(WAVE, FLUX, strict=True))
    return ("# wave flux err, wavelength in air, barycentric frame\n" + rows).encode()


def _astropy(form: str) -> bytes:
    from astropy.table import Table

    made, stream = Table({"wave": WAVE, "flux": FLUX}), io.BytesIO()
    made["wave"].unit = "Angstrom"
    if form == "votable":
        made.write(stream, format="votable")
        return stream.getvalue()
    words = io.StringIO()
    made.write(words, format="ascii.ecsv")
    return words.getvalue().encode()


def votable() -> bytes:
    return _astropy("votable")


def ecsv() -> bytes:
    return _astropy("ecsv")


GOOD = {f.__name__: f for f in (image, table, companions, cells, lookup, text, votable, ecsv)}
GOOD["gzip"] = lambda: gzip.compress(image(), mtime=0)
GOOD["bzip2"] = lambda: bz2.compress(table())


def _bits(data: bytearray, rng) -> bytes:
    for at in rng.integers(0, len(data), rng.integers(1, 60)):
        data[at] ^= 1 << int(rng.integers(8))
    return bytes(data)


def _cut(data: bytearray, rng) -> bytes:
    return bytes(data[: rng.integers(1, len(data))])


_VALUES = ("T", "F", "-1", "0", "1", "7", "999", "2000000000000", "-2147483648", "1E300", "1E-300",
           "-5000.0", "NaN", "'x'", "''", "'WAVE-GRI'", "'VELO-F2V'", "'km/s'", "'1024E'",
           "'999999999D'", "'1PE(9)'", "'furlong'", "", "1" * 60, "'" + "z" * 60 + "'")
_KEYS = ("SIMPLE", "BITPIX", "NAXIS", "NAXIS1", "NAXIS2", "NAXIS3", "EXTEND", "XTENSION", "PCOUNT",
         "GCOUNT", "TFIELDS", "TTYPE1", "TTYPE2", "TFORM1", "TFORM2", "TUNIT1", "TDIM1", "THEAP",
         "CTYPE1", "CUNIT1", "CRVAL1", "CDELT1", "CRPIX1", "CD1_1", "PC1_1", "PV1_1", "PS1_0",
         "RESTFRQ", "RESTWAV", "SPECSYS", "BSCALE", "BZERO", "BLANK", "TSCAL1", "TZERO1", "TNULL1",
         "DC-FLAG", "COEFF0", "COEFF1", "WCSAXES", "END")


def _edited(data: bytearray, rng) -> bytes:
    """Cards overwritten with impossible values, by keyword or in any place of a header."""
    blocks = [b for b in range(0, len(data) - 80, 80)
              if data[b:b + 8].strip() and data[b + 8:b + 10] == b"= "]
    for _ in range(int(rng.integers(1, 5))):
        key, value = _KEYS[rng.integers(len(_KEYS))], _VALUES[rng.integers(len(_VALUES))]
        same = [b for b in blocks if data[b:b + 8].strip() == key.encode()]
        pool = same or blocks
        if pool:
            at = pool[int(rng.integers(len(pool)))]
            data[at:at + 80] = f"{key:<8}= {value:>20}".ljust(80)[:80].encode()
    return bytes(data)


def _swapped(data: bytearray, rng) -> bytes:
    """Blocks of 2880 bytes exchanged, repeated or left out: HDUs in the wrong order."""
    blocks = [data[b:b + 2880] for b in range(0, len(data), 2880)]
    a, b = (int(i) for i in rng.integers(0, len(blocks), 2))
    how = rng.integers(3)
    if how == 0:
        blocks[a], blocks[b] = blocks[b], blocks[a]
    elif how == 1:
        blocks.insert(a, blocks[b])
    else:
        del blocks[a]
    return b"".join(bytes(block) for block in blocks)


def _spliced(data: bytearray, rng) -> bytes:
    """The head of one layout on the body of another."""
    other = GOOD[list(GOOD)[rng.integers(len(GOOD))]]()
    return bytes(data[: rng.integers(1, len(data))]) + other[rng.integers(0, len(other)):]


def _words(data: bytearray, rng) -> bytes:
    """Runs of bytes replaced by text that means something to some reader."""
    parts = (b"nan", b"1e999", b"\0\0\0\0", b"\xff\xfe", b"----", b"<!ENTITY a 'b'>", b"],[", b"\n\n",
             b"9" * 40, b"%ECSV", b"</TABLE>", b"!!python/object:os.system")
    for _ in range(int(rng.integers(1, 6))):
        word, at = parts[rng.integers(len(parts))], int(rng.integers(len(data)))
        data[at:at + len(word)] = word
    return bytes(data)


DAMAGE = {"bits": _bits, "cut": _cut, "edited": _edited, "swapped": _swapped, "spliced": _spliced,
          "words": _words}


def hostile(number: int) -> tuple[str, str, bytes]:
    """(layout, damage, bytes) of hostile file ``number``; the same number, the same file."""
    rng = np.random.default_rng(1000 + number)
    layout = list(GOOD)[number % len(GOOD)]
    damage = list(DAMAGE)[(number // len(GOOD)) % len(DAMAGE)]
    return layout, damage, DAMAGE[damage](bytearray(GOOD[layout]()), rng)


def no_spectrum(number: int) -> bytes:
    """FITS files that are well made and hold no spectrum: catalogues, pictures, masks, events."""
    rng = np.random.default_rng(number)
    kind = number % 6
    if kind == 0:
        hdu = fits.PrimaryHDU(rng.normal(size=(60, 60)))
        hdu.header.update(CTYPE1="RA---TAN", CTYPE2="DEC--TAN", CRVAL1=10.0, CDELT1=-1e-4)
        return _written([hdu])
    if kind == 1:
        columns = [fits.Column(n, "D", array=rng.uniform(0, 360, 50)) for n in ("ra", "dec", "mag")]
        return _written([fits.PrimaryHDU(), fits.BinTableHDU.from_columns(columns)])
    if kind == 2:
        hdu = fits.PrimaryHDU(rng.normal(size=200))
        hdu.header.update(CTYPE1="VELOCITY", CUNIT1="km/s", CRVAL1=-100.0, CDELT1=1.0)
        return _written([hdu])
    if kind == 3:
        columns = [fits.Column(n, "J", array=rng.integers(0, 999, 80)) for n in ("x", "y", "pha")]
        return _written([fits.PrimaryHDU(), fits.BinTableHDU.from_columns(columns, name="EVENTS")])
    if kind == 4:
        hdu = fits.PrimaryHDU(rng.normal(size=300))
        hdu.header.update(CTYPE1="TIME", CUNIT1="s", CRVAL1=0.0, CDELT1=60.0)
        return _written([hdu])
    return _written([fits.PrimaryHDU(rng.integers(0, 2, (40, 40)).astype("u1"))])


def outcome(path) -> str:
    """'spectrum' or the refusal's line; raises on anything else, on bad arrays and on delay."""
    start = time.perf_counter()
    try:
        result = read_spectrum(path)
    except InputRefused as refusal:
        line = str(refusal)
        assert line.startswith(str(path)) and "\n" not in line, line
        assert refusal.cause and refusal.cure and len(line) < 400 + len(str(path)), line
    else:
        assert isinstance(result, Spectrum)
        for segment in result.segments:
            assert len(segment.wave) == len(segment.flux) == len(segment.mask)
            assert (np.diff(segment.wave) > 0).all() and np.isfinite(segment.wave).all()
        line = "spectrum"
    elapsed = time.perf_counter() - start
    assert elapsed < LIMIT_S, f"{elapsed:.1f} s"
    return line
