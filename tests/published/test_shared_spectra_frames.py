"""Real telluric lines tell the frame, its contradictions and the wavelength zero point."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from linewright.errors import InputRefused
from linewright.job.observer_frame import frame_doubts, measured_zero_point, observer_lines
from linewright.lines.loading import load_catalogue
from linewright.measure.core import measure_spectrum
from linewright.measure.options import MeasureOptions
from linewright.spectra.earth_motion import corrected, zero_point_removed
from linewright.spectra.medium import air_to_vacuum
from linewright.spectra.reading import read_spectrum

SHARED = Path(__file__).resolve().parents[2].parent / "shared" / "spectra"
pytestmark = pytest.mark.skipif(
    not SHARED.is_dir(), reason="the shared spectra do not stand beside this checkout")
BANDS = ((5860.0, 6000.0), (6270.0, 6330.0), (6460.0, 6620.0),
         (6860.0, 6980.0))  # air; H2O, O2 gamma, H2O, O2 B
CATALOGUE = load_catalogue()
# The correction in the header of the M dwarf's file (HARPS), checked in test_barycentric.
BERV = -23.5438771778635


def measured(spectrum, resolution=None):
    ranges = tuple(tuple(map(float, air_to_vacuum(list(b)))) for b in BANDS)
    return measure_spectrum(spectrum, MeasureOptions(resolution, ranges=ranges)).features


@pytest.fixture(scope="module")
def dwarf():
    spectrum = read_spectrum(SHARED / "mdwarf_r115000_s1d.fits")
    return spectrum, measured(spectrum, 115000.0)


def test_telluric_lines_stand_at_the_correction(dwarf):
    """HARPS is stable to metres a second; HITRAN 2004 positions and winds allow 0.3 km/s."""
    spectrum, features = dwarf
    found = observer_lines(features, CATALOGUE)
    assert found.kind == "telluric" and found.lines > 50
    assert found.velocity == pytest.approx(BERV, abs=0.3)
    assert frame_doubts(spectrum, features, CATALOGUE) == ()
    assert measured_zero_point(spectrum, features, CATALOGUE).velocity == pytest.approx(0, abs=0.3)


@pytest.mark.parametrize(("stated", "words"), [
    ({"frame": "topocentric", "observer_velocity": float("nan")}, "frame topocentric"),
    ({"observer_velocity": 12.0}, "instead of +12.0"),
])
def test_a_false_frame_is_pointed_out(dwarf, stated, words):
    spectrum, features = dwarf
    doubts = frame_doubts(replace(spectrum, **stated), features, CATALOGUE)
    assert words in doubts[0] and "telluric lines stand at -23." in doubts[0]


def test_a_correction_that_was_not_applied_is_pointed_out():
    """The file as if its header spoke of a correction its wavelengths never had."""
    asked = read_spectrum(SHARED / "mdwarf_r115000_s1d.fits", frame="topocentric")
    back = corrected(asked, -BERV)  # to within 2 m/s the observed wavelengths
    false = replace(back, frame="barycentric", frame_from="header", observer_velocity=BERV)
    (doubt,) = frame_doubts(false, measured(back, 115000.0), CATALOGUE)
    assert "-23.54 km/s seems not applied" in doubt


def test_air_read_as_vacuum_is_pointed_out():
    false = read_spectrum(SHARED / "mdwarf_r115000_s1d.fits", medium="vacuum")
    (doubt,) = frame_doubts(false, measured(false, 115000.0), CATALOGUE)
    assert "as if the wavelengths were air" in doubt


def test_the_suns_telluric_lines_move_with_a_zero_point():
    """Reflected sunlight at rest: telluric lines at an unknown shift, near -24 km/s."""
    sun = read_spectrum(SHARED / "sun_r47000.txt", medium="air", frame="topocentric")
    before = measured_zero_point(sun, measured(sun), CATALOGUE)
    assert before.lines > 30 and before.error < 0.5
    assert "instead of +0.0" in frame_doubts(sun, measured(sun), CATALOGUE)[0]
    moved = zero_point_removed(sun, before.velocity, before.error)
    after = measured_zero_point(moved, measured(moved), CATALOGUE)
    assert abs(after.velocity) < 0.1
    assert frame_doubts(moved, measured(moved), CATALOGUE) == ()
    assert f"{before.velocity:+.4f} +- {before.error:.4f}" in moved.corrections[-1]


def test_where_nothing_tells_nothing_is_measured():
    star = read_spectrum(SHARED / "ttauri_r40000_blue.fits")
    features = measure_spectrum(star, MeasureOptions(ranges=((4000.0, 4200.0),))).features
    assert observer_lines(features, CATALOGUE) is None
    with pytest.raises(InputRefused, match="no clear telluric or sky lines"):
        measured_zero_point(star, features, CATALOGUE)


def test_low_resolution_blends_bands_and_is_not_asked():
    """At R 2,000 the band's lines blend: an answer would be tens of km/s off (+30 is stated)."""
    star = read_spectrum(SHARED / "gdwarf_r2000_18hdu.fits")
    features = measure_spectrum(star).features
    assert observer_lines(features, CATALOGUE) is None
    assert frame_doubts(star, features, CATALOGUE) == ()
