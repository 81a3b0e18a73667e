"""A species at a velocity that was only fitted to the features is never called present."""

from __future__ import annotations

import numpy as np

from linewright.claims.identify import identify
from linewright.claims.options import ClaimOptions
from linewright.lines.loading import load_catalogue
from linewright.measure.features_from import features_from_columns

LOW, HIGH = 5200.0, 5500.0


def scrambled_roll(seed: int, velocity: float | None):
    """Roll call of 135 features at random places, with depths of a crowded spectrum."""
    rng = np.random.default_rng([5, seed])
    places = np.sort(rng.uniform(LOW, HIGH, 135))
    depth = 10.0 ** rng.uniform(-1.5, -0.2, len(places))
    table = features_from_columns(places, wave_err=0.008, depth=depth, depth_err=0.005, fwhm=0.12)
    options = ClaimOptions(velocity=velocity, temperature=5200.0)
    return identify(table, ((LOW, HIGH),), load_catalogue(), options)


def test_an_undeclared_velocity_makes_no_species_present():
    for seed in range(4):
        found = scrambled_roll(seed, None)
        assert not found.velocity.declared
        assert found.roll_call
        assert all(row.verdict != "present" for row in found.roll_call)
        assert min(row.p_chance for row in found.roll_call) > 0.5


def test_a_given_velocity_leaves_the_chance_probability_alone():
    smallest = [min(r.p_chance for r in scrambled_roll(s, 0.0).roll_call) for s in range(4)]
    assert min(smallest) < 0.5
