"""Errors mean one sigma: pulls of isolated simulated lines, not chosen by detection."""

from __future__ import annotations

import numpy as np
import pytest
from measure_simulation import Lines, pulls_of

CASES = [
    Lines(pixels=3.0, count=600),
    Lines(pixels=5.0, count=600, snr=100.0),
    Lines(pixels=10.0, count=600, blur=1.2),
    Lines(pixels=4.0, count=600, depth=-2.0),
]


@pytest.mark.parametrize("lines", CASES, ids=lambda c: f"{c.pixels:g}px,blur{c.blur:g},{c.depth:g}")
def test_pulls_of_isolated_lines_have_unit_width(lines):
    pulls, found, measured = pulls_of(lines)
    assert found == 1.0
    assert len(measured.features) - lines.count <= 4  # one false feature is expected
    for name, pull in pulls.items():
        # 600 lines: the width of a unit normal is known to 0.029, its mean to 0.041; least
        # squares of a non-linear model is biased by about 1/significance of its sigmas;
        # depth and equivalent width share one continuum, hence its error, in common
        assert np.std(pull) == pytest.approx(1.0, abs=0.1), name
        shared = 0.2 if name in ("depth", "ew") else 0.0
        bias = 1.0 / np.median(measured.features.significance)
        assert abs(np.mean(pull)) < 3 * 0.041 + bias + shared, name
    level = np.interp(5100.0, measured.segments[0].node_wave, measured.segments[0].node_flux)
    assert level == pytest.approx(1000.0, rel=0.003)


def test_given_uncertainties_give_the_same_errors():
    lines = Lines(pixels=4.0, count=300)
    own = pulls_of(lines)[2].features
    given = pulls_of(lines, with_errors=True)[2].features
    assert np.median(own.wave_err) == pytest.approx(np.median(given.wave_err), rel=0.03)
