"""Labels along a line: none overlapping, order kept, the important ones first."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from linewright.publish.placement import choose, spread

ANCHORS = st.lists(st.floats(0, 400), min_size=1, max_size=60).map(sorted)
SLACK = 1e-6


@settings(deadline=None)
@given(ANCHORS)
def test_spread_keeps_apart_inside_and_in_order(anchors):
    places = spread(anchors, 8.0, -50.0, 470.0)
    assert np.all(np.diff(places) >= 8.0 - SLACK)
    assert places[0] >= -50.0 - SLACK and places[-1] <= 470.0 + SLACK


def test_spread_leaves_alone_what_is_apart_already():
    np.testing.assert_allclose(spread([10.0, 30.0, 50.0], 8.0, 0.0, 60.0), [10.0, 30.0, 50.0])


@settings(deadline=None, max_examples=40)
@given(st.lists(st.floats(0, 60), min_size=2, max_size=5).map(sorted))
def test_spread_is_the_least_squares_solution(anchors):
    """Against a general solver (scipy's SLSQP) on small problems."""
    from scipy.optimize import minimize

    anchors = np.array(anchors)
    places = spread(anchors, 8.0, 0.0, 60.0)
    limits = [{"type": "ineq", "fun": lambda x: np.diff(x) - 8.0}]
    start = np.linspace(0.0, 60.0, len(anchors))
    best = minimize(
        lambda x: np.sum((x - anchors) ** 2), start, constraints=limits,
        bounds=[(0.0, 60.0)] * len(anchors), options={"ftol": 1e-12, "maxiter": 500},
    )  # fmt: skip
    assert np.sum((places - anchors) ** 2) <= best.fun + 1e-4


@settings(deadline=None)
@given(ANCHORS, st.floats(5, 60))
def test_choose_respects_reach_and_room(anchors, reach):
    order = np.argsort(np.sin(np.arange(len(anchors)) * 12.9898))
    kept, places = choose(anchors, order, 8.0, 0.0, 400.0, reach)
    assert np.all(np.diff(kept) > 0)
    assert order[0] in kept, "the most important label is always shown"
    chosen = np.array(anchors)[kept]
    assert np.all(np.abs(places - chosen) <= reach + SLACK)
    assert np.all(np.diff(places) >= 8.0 - SLACK)
    assert places[0] >= -SLACK and places[-1] <= 400.0 + SLACK


def test_the_least_important_give_way():
    kept, _ = choose([50.0] * 10, [7, 3, 5, *range(10)], 8.0, 0.0, 100.0, 8.0)
    assert set(kept) == {3, 5, 7}


@pytest.mark.parametrize("high", [-10.0, -0.1])
def test_no_room_at_all(high):
    kept, places = choose([1.0], [0], 8.0, 0.0, high, 50.0)
    assert len(kept) == len(places) == 0
