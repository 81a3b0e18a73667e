"""The curve drawn over a feature has the shape the feature was fitted with."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.measure.by_hand import fit_profile
from linewright.measure.features_from import features_from_columns
from linewright.measure.shapes import profile, width_and_area


def one(flag, params, kind="voigt"):
    """(features of one line measured without error, its parameters)"""
    fwhm, area = width_and_area(kind, params)
    table = features_from_columns(params[1], 0.01, params[0], fwhm, ew=1e3 * params[0] * area,
                                  continuum=1.0)  # fmt: skip
    return replace(table, flags=(flag,))


def test_a_line_with_damping_wings_is_drawn_with_wings():
    """Pseudo-Voigt against the Voigt profile itself: within 2 % of the depth."""
    params = np.array([0.8, 5000.0, np.log(0.2), np.log(0.25)])
    wave, flux = fit_profile(one("blend voigt", params), 0)
    truth = 1.0 - profile("voigt", wave, params)[0]
    assert np.max(np.abs(flux - truth)) < 0.02 * 0.8
    _, plain = fit_profile(one("", params), 0)
    assert np.max(np.abs(plain - truth)) > 0.05


@pytest.mark.parametrize("width", [0.1, 0.4])
def test_a_plain_line_is_drawn_as_a_gaussian(width):
    params = np.array([0.5, 5000.0, np.log(width)])
    wave, flux = fit_profile(one("", params, "gaussian"), 0)
    assert np.allclose(flux, 1.0 - profile("gaussian", wave, params)[0], atol=1e-3)
