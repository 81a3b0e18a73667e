"""Odds of air and vacuum with a tilted calibration allowed, on simulated lists."""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "studies"))
import spectra_medium_study as study  # noqa: E402, I001

from linewright.job.medium_odds import MediumOdds, medium_odds, tilted  # noqa: E402
from linewright.job.options import SolveOptions  # noqa: E402
from linewright.lines.loading import load_catalogue  # noqa: E402

CATALOGUE = load_catalogue()


@pytest.mark.parametrize("air", [True, False])
def test_a_wide_range_decides(air):
    """50 strong lines over 3800-9000 A decide (method: so do 200 over 4000-6500)."""
    features = study.simulated(CATALOGUE, (3800.0, 9000.0, 60), np.random.default_rng(4), 0.2, air)
    odds = medium_odds(features, CATALOGUE, SolveOptions())
    assert odds.decided == ("air" if air else "vacuum")
    assert odds.air + odds.vacuum == pytest.approx(1.0)


@pytest.mark.parametrize("tilt", [-0.3, 0.3])
def test_a_narrow_range_with_a_tilt_is_not_decided(tilt):
    """Over 5000-5500 A a tilt of 0.3 km/s imitates the other medium: no decision."""
    for air in (True, False):
        features = study.simulated(CATALOGUE, (5000.0, 5500.0, 80), np.random.default_rng(5), tilt,
                                   air)
        odds = medium_odds(features, CATALOGUE, SolveOptions())
        assert odds.decided == "" and abs(odds.velocity_air - odds.velocity_vacuum) == (
            pytest.approx(83.5, abs=2.0))


def test_a_tilt_is_undone_by_its_opposite():
    features = study.table(np.linspace(5000.0, 6000.0, 30), np.full(30, 0.3))
    twice = tilted(tilted(features, 5.0), -5.0)
    assert np.allclose(twice.wave, features.wave, rtol=1e-9)
    shift = 299792.458 * (features.wave / tilted(features, 5.0).wave - 1)
    assert shift[[0, -1]] == pytest.approx([-5.0, 5.0], abs=1e-3)


def test_no_features_leave_even_odds():
    empty = study.table([], [])
    odds = medium_odds(empty, CATALOGUE, SolveOptions())
    assert (odds.air, odds.decided) == (0.5, "")


def test_the_words_say_what_was_allowed():
    words = MediumOdds(0.97, 0.03, 1.0, -82.0, tilt_sigma=0.3).in_words()
    assert "air 0.97 at +1.0 km/s" in words and "tilt of 0.3 km/s" in words and "favour air" in words
