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
