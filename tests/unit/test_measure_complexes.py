"""Lines of several parts, from a simulator that is no sum of Gaussians; and lines of one part."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))
from shapes_simulation import Scene, bell, disc, saturated, turned, voigt  # noqa: E402

from linewright.measure.by_hand import fit_profile  # noqa: E402
from linewright.measure.core import measure_spectrum  # noqa: E402
from linewright.measure.drawn import compound_groups, peaks_of  # noqa: E402
from linewright.spectra.medium import C_KM_S  # noqa: E402

SHAPES = (
    lambda v: 1 + disc(v, 1.5, 110.0),
    lambda v: (1 + 1.5 * bell(v, 30, 200)) * np.exp(-1.2 * bell(v, -180, 100)),
    lambda v: (1 + 4 * bell(v, 0, 200)) * np.exp(-bell(v, -10, 50)),
    lambda v: 1 - 0.8 * voigt(v, 60, 200) + 0.4 * bell(v, 2, 25),
)
PLAIN = (
    lambda v: 1 - 0.7 * voigt(v, 60, 200),
    lambda v: 1 - saturated(v, 20.0, 30.0, 10.0),
    lambda v: 1 - turned(0.5 * voigt(v, 12, 30), 150),
    lambda v: 1 + 3 * bell(v, 0, 250),
    lambda v: 1 + 3 * voigt(v, 60, 100),
)


def measured(lines):
    scene = Scene(lines, crowd=0.12)
    spectrum = scene.build()
    return spectrum, measure_spectrum(spectrum).features, scene.places


@pytest.fixture(scope="module")
def shapes():
    return measured(SHAPES)


def group_at(features, place):
    near = [g for g in compound_groups(features)
            if np.all(np.abs(features.wave[g] / place - 1) * C_KM_S < 500)]
    assert len(near) == 1
    return near[0]


def test_two_peaks_of_a_disc(shapes):
    """Peaks near +-110 km/s (the outer edge's velocity; Smak 1981), of equal height."""
    _, f, places = shapes
    rows = group_at(f, places[0])
    peaks = peaks_of(f, rows)
    assert C_KM_S * peaks.apart / places[0] == pytest.approx(225.0, rel=0.06)
    assert abs(peaks.ratio - 1.0) < 3 * peaks.ratio_err and peaks.ratio_err < 0.2


def test_absorption_of_a_wind_before_emission(shapes):
    _, f, places = shapes
    dark, bright = group_at(f, places[1])
    assert (f.sign[dark], f.sign[bright]) == (1, -1)
    assert abs(C_KM_S * (f.wave[dark] / places[1] - 1) + 180) < 5 * C_KM_S * f.wave_err[dark] / places[1]
    assert f.depth[dark] == pytest.approx(1 - np.exp(-1.2), abs=0.05)  # of the light behind it
    assert -f.depth[bright] == pytest.approx(1.5, rel=0.05)


def test_absorbed_emission_and_a_filled_core(shapes):
    _, f, places = shapes
    for place, inside, sign in ((places[2], -10.0, 1), (places[3], 2.0, -1)):
        rows = group_at(f, place)
        own = rows[f.sign[rows] == sign]
        assert len(rows) == 2 and len(own) == 1
        assert C_KM_S * (f.wave[own[0]] / place - 1) == pytest.approx(inside, abs=2.0)


def test_the_curve_drawn_over_a_part_is_the_whole_line(shapes):
    spectrum, f, places = shapes
    s = spectrum.segments[0]
    for place in places:
        rows = group_at(f, place)
        wave, flux = fit_profile(f, int(rows[0]), neighbours=True)
        k = (s.wave > wave[0]) & (s.wave < wave[-1])
        off = (np.interp(s.wave[k], wave, flux) - s.flux[k]) / np.ptp(s.flux[k])
        assert np.sqrt(np.median(off**2)) < 0.05


def test_lines_of_one_part_stay_one():
    """Damped, saturated, rotating lines; plain and winged emission."""
    _, f, _ = measured(PLAIN)
    assert compound_groups(f) == []
