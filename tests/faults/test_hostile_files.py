"""Two hundred hostile files of the thousand in the study, and headers hypothesis makes up."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest
from astropy.io import fits
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

sys.path.insert(0, str(Path(__file__).resolve().parent))
from hostile import GOOD, hostile, no_spectrum, outcome  # noqa: E402, I001


@pytest.mark.parametrize("layout", GOOD)
def test_every_layout_opens_undamaged(tmp_path, layout):
    path = tmp_path / "good"
    path.write_bytes(GOOD[layout]())
    assert outcome(path) == "spectrum"


@pytest.mark.filterwarnings("ignore::Warning")
def test_two_hundred_hostile_files(tmp_path):
    path, refused = tmp_path / "hostile", 0
    for number in range(0, 1000, 5):
        layout, damage, data = hostile(number + (number // 60) % 5)
        path.write_bytes(data)
        refused += outcome(path) != "spectrum"
    assert 100 <= refused < 200


def test_files_without_a_spectrum_stay_closed(tmp_path):
    path = tmp_path / "none.fits"
    for number in range(24):
        path.write_bytes(no_spectrum(number))
        assert outcome(path) != "spectrum", number


keywords = st.sampled_from(
    "CTYPE1 CUNIT1 CRVAL1 CDELT1 CRPIX1 CD1_1 PC1_1 PV1_0 PV1_1 PS1_0 RESTWAV RESTFRQ DC-FLAG COEFF0 "
    "COEFF1 SPECSYS WCSAXES CNAME1 VELOSYS BUNIT BSCALE BZERO MEDIUM AIRORVAC HELIO BERV RA DEC "
    "MJD-OBS DATE-OBS EXPTIME OBSGEO-X OBSGEO-Y OBSGEO-Z TELESCOP TIMESYS SPEC_RES WAT1_001".split())
values = st.one_of(
    st.booleans(), st.integers(-2**40, 2**40), st.floats(allow_nan=False, allow_infinity=False),
    st.sampled_from(["WAVE", "AWAV-LOG", "FREQ-W2F", "VELO-F2V", "WAVE-TAB", "WAVE-GRI", "WAVE-XYZ",
                     "ZOPT-F2W", "ENER", "Angstrom", "km/s", "BARYCENT", "air", "m/m", "10^3 m"]),
    st.text(st.characters(min_codepoint=32, max_codepoint=126), max_size=30))


@settings(max_examples=150, deadline=None,
          suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(st.dictionaries(keywords, values, max_size=12))
@pytest.mark.filterwarnings("ignore::Warning")
def test_headers_made_up(tmp_path, cards):
    hdu = fits.PrimaryHDU(np.linspace(1.0, 2.0, 64))
    for key, value in cards.items():
        hdu.header[key] = value
    path = tmp_path / "made.fits"
    hdu.writeto(path, overwrite=True, output_verify="ignore")
    outcome(path)


@pytest.mark.parametrize("padding", [0, 200_000])
def test_an_xml_bomb_is_refused_unread(tmp_path, padding):
    """Ten entities of ten each, ten deep: 10^10 bytes when expanded."""
    levels = "".join(f'<!ENTITY e{i} "{f"&e{i - 1};" * 10}">' for i in range(1, 10))
    data = (f'<?xml version="1.0"?><!-- VOTABLE {"x" * padding} --><!DOCTYPE VOTABLE ['
            f'<!ENTITY e0 "boom">{levels}]><VOTABLE><DESCRIPTION>&e9;</DESCRIPTION></VOTABLE>')
    path = tmp_path / "bomb.xml"
    path.write_text(data)
    assert "entity declarations" in outcome(path)


def test_an_external_entity_is_refused(tmp_path):
    path = tmp_path / "outside.xml"
    path.write_text('<?xml version="1.0"?><!DOCTYPE VOTABLE [<!ENTITY x SYSTEM "file:///etc/hosts">]>'
                    "<VOTABLE><DESCRIPTION>&x;</DESCRIPTION></VOTABLE>")
    assert "entity declarations" in outcome(path)


def _many_hdus() -> bytes:
    import io

    stream = io.BytesIO()
    fits.HDUList([fits.PrimaryHDU()] + [fits.ImageHDU(np.zeros(2))] * 1500).writeto(stream)
    return stream.getvalue()


def _many_columns() -> bytes:
    import io

    columns = [fits.Column(f"c{i}", "D", array=np.zeros(10)) for i in range(998)]
    stream = io.BytesIO()
    fits.HDUList([fits.PrimaryHDU(), fits.BinTableHDU.from_columns(columns)]).writeto(stream)
    return stream.getvalue()


def _zipped(data: bytes) -> bytes:
    import gzip

    return gzip.compress(data, 1)


SLOW = {
    "not a number, line after line": lambda: b"nan nan\n" * 200_000,
    "words, line after line": lambda: b"hello world again\n" * 200_000,
    "every second line words": lambda: b"5000 1\nsome words\n" * 100_000,
    "one endless line": lambda: b"5000 " * 2_000_000,
    "1,500 HDUs": _many_hdus,
    "998 columns": _many_columns,
    "zeros, packed": lambda: _zipped(b"\0" * 50_000_000),
    "200 MB of text, packed": lambda: _zipped(b"5000 1\n" * 28_000_000),
    "XML without end": lambda: b'<?xml version="1.0"?><VOTABLE>' + b"<RESOURCE>" * 100_000,
    "a thousand columns of one name": lambda: (
        b"# %ECSV 1.0\n# ---\n# datatype:\n" + b"# - {name: a, datatype: float64}\n" * 1000 + b"a\n"),
}


@pytest.mark.parametrize("name", SLOW)
def test_files_made_to_be_slow_are_refused_in_time(tmp_path, name):
    path = tmp_path / "slow"
    path.write_bytes(SLOW[name]())
    assert outcome(path) != "spectrum"
