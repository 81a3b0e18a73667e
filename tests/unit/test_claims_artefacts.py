"""Cosmic-ray hits in a sample are set aside, whatever line is near."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.claims.artefacts import is_spike, with_spikes
from linewright.claims.problem import NOT_SAID, SET_ASIDE
from linewright.job.solve import solve
from linewright.measure.features_from import features_from_columns
from linewright.resources import samples_dir
from linewright.spectra.reading import read_spectrum


def test_words_for_spikes():
    from dataclasses import replace

    table = features_from_columns(np.array([5000.0, 5001.0, 5002.0]), wave_err=0.01)
    assert with_spikes(table, None) is None
    table = replace(table, flags=("", "spike", "spike hand"))
    assert is_spike(table).tolist() == [False, True, True]
    assert with_spikes(table, None).tolist() == [NOT_SAID, SET_ASIDE, SET_ASIDE]
    assert with_spikes(table, np.array([NOT_SAID, NOT_SAID, 3])).tolist() == [-1, -2, 3]


def test_cosmic_rays_of_the_cool_giant_are_set_aside():
    session = solve(read_spectrum(samples_dir() / "cool_giant.fits"))
    aside = [c for c in session.claims if c.standing == "set aside"]
    assert len(aside) >= 20  # the truth table holds about forty hits
    assert {c.origin for c in aside} == {"artefact"}
    assert all(c.probability < 0.5 for c in aside)
    assert session.velocity.velocity == pytest.approx(-81.3, abs=0.3)
