"""Label placement: no overlap, order kept, nearest places, the important first."""

from __future__ import annotations

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from linewright.window.plot.placement import MAX_SHIFT, place, ration, spread

places = st.lists(st.floats(0, 1000), min_size=1, max_size=60).map(sorted)


@settings(deadline=None)
@given(wanted=places, width=st.floats(1, 30))
def test_spread_keeps_distance_and_order(wanted, width):
    found = spread(wanted, width)
    assert len(found) == len(wanted)
    assert np.all(np.diff(found) >= width - 1e-6)


def test_spread_leaves_alone_what_does_not_collide():
    assert spread([0.0, 50.0, 100.0], 10.0).tolist() == [0.0, 50.0, 100.0]


def test_spread_centres_a_cluster_on_its_mean():
    np.testing.assert_allclose(spread([100.0, 100.0, 103.0], 10.0), [91.0, 101.0, 111.0])


@settings(max_examples=25, deadline=None)
@given(wanted=st.lists(st.floats(0, 60), min_size=2, max_size=5).map(sorted))
def test_spread_is_the_least_squares_answer(wanted):
    """No small feasible change lowers the sum of squared shifts (convex problem)."""
    width = 10.0
    found = spread(wanted, width)
    cost = np.sum((found - wanted) ** 2)
    rng = np.random.default_rng(0)
    for _ in range(300):
        other = found + rng.normal(0, 0.5, len(found))
        if np.all(np.diff(other) >= width):
            assert np.sum((other - wanted) ** 2) >= cost - 1e-6


@settings(deadline=None)
@given(wanted=places, right=st.floats(5, 1200))
def test_place_stays_inside_and_apart(wanted, right):
    width = 14.0
    kept, found = place(wanted, width, (0.0, right))
    assert np.all(np.diff(found) >= width - 1e-6)
    assert np.all(found >= width / 2 - 1e-6) and np.all(found <= right - width / 2 + 1e-6)
    assert np.all(np.abs(found - np.array(wanted)[kept]) <= MAX_SHIFT * width)


def test_ration_keeps_the_important():
    anchor = np.linspace(0, 100, 101)
    importance = np.zeros(101)
    importance[50] = np.inf
    kept = ration(anchor, importance, 14.0)
    assert 50 in kept and len(kept) < 20
    assert np.all(np.diff(kept) > 0)
