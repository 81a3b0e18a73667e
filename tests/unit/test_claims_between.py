"""Star against air in one feature: probabilities come true on features drawn another way."""

from __future__ import annotations

from dataclasses import replace
from types import SimpleNamespace

import numpy as np
import pytest

from linewright.claims.between import Seen, Side, _as_before, _shares, alone, depth_of, logit
from linewright.claims.between import shared_between
from linewright.claims.breakdown import Breakdown
from linewright.claims.curves import CENTRES, StrengthRelation, threshold_form
from linewright.claims.model import Candidate
from linewright.claims.unlisted import STRENGTH_BINS
from linewright.job.view_breakdown import terms

N, POSITION, STRENGTH, RATE = 6000, 0.006, 0.06, 0.05  # Angstrom, dex, unlisted per Angstrom
FLAT = np.where(np.abs(STRENGTH_BINS[:-1] + 1.0) < 0.9, 0.5, 1e-6)  # per dex, -1.9 to -0.1


def drawn(seed: int, apart: float):
    """Features that air (0.9), star (0.9) and unlisted lines (0.05 per Angstrom) make, as drawn;
    (Seen, air, star, index of the main contributor)."""
    rng = np.random.default_rng(seed)
    expected = rng.uniform(-1.6, -0.2, (2, N))
    expected[1] = expected[0] + rng.uniform(-0.6, 0.6, N)
    place = np.vstack([np.zeros(N), rng.uniform(-apart, apart, N)])
    air = Side(expected[0], 0.08, place[0], np.full(N, POSITION), np.full(N, 0.9), np.ones(N))
    star = Side(expected[1], 0.25, place[1], np.full(N, POSITION), np.full(N, 0.9), np.ones(N))
    here = np.vstack([rng.random((2, N)) < 0.9, rng.random(N) < RATE * 0.2])
    depth = np.vstack([
        depth_of(expected[0] + 0.08 * rng.standard_normal(N)),
        depth_of(expected[1] + 0.25 * rng.standard_normal(N)),
        depth_of(rng.uniform(-1.8, -0.2, N)),
    ]) * here  # fmt: skip
    places = np.vstack([place, rng.uniform(-0.1, 0.1, N)])
    kept = here.any(axis=0) & ~(here[1] & here[2])
    total = 1.0 - np.prod(1.0 - depth, axis=0)
    m = logit(np.clip(total, 1e-4, 0.99)) + STRENGTH * rng.standard_normal(N)
    x = np.sum(depth * places, axis=0) / np.maximum(depth.sum(axis=0), 1e-9)
    x = x + POSITION * rng.standard_normal(N)
    seen = Seen(m, np.full(N, STRENGTH), x, np.full(N, 0.1), np.full(N, RATE), FLAT,
                np.ones(N))  # fmt: skip
    return seen, air, star, np.argmax(depth, axis=0), kept


@pytest.mark.parametrize(("seed", "apart"), [(1, 0.0), (2, 0.08)])
def test_probabilities_of_the_main_contributor_come_true(seed, apart):
    seen, air, star, truth, kept = drawn(seed, apart)
    p, right = _shares(seen, air, star)[kept, 0], truth[kept] == 0
    for low in np.arange(0.0, 1.0, 0.1):
        here = (p >= low) & (p <= low + 0.1)
        error = 2.0 * np.sqrt(0.25 / max(here.sum(), 1))
        assert abs(right[here].mean() - p[here].mean()) < 0.03 + error
    assert np.mean((p > 0.5) == right) > 0.85


def one(m, there=1.0, air=-1.0, star=-1.0, shows=1.0):
    """Shares of a feature of strength m at the common place of an air's and a star's line."""
    side = [Side(np.array([s]), w, np.zeros(1), np.full(1, POSITION), np.array([t]), np.ones(1))
            for s, w, t in ((air, 0.08, 0.95), (star, 0.25, 0.95 * there))]  # fmt: skip
    seen = Seen(np.array([m]), np.array([STRENGTH]), np.zeros(1), np.array([0.1]),
                np.array([RATE]), FLAT, np.array([shows]))  # fmt: skip
    return _shares(seen, *side)[0]


def test_the_depth_beside_the_air_decides():
    """Air of depth 0.091: a feature as deep is the air's, one of 0.3 is mostly another's."""
    assert one(-1.0, star=-1.8)[0] > 0.95
    assert one(logit(0.3), star=-0.6)[1] > 0.95
    assert one(logit(0.3), there=0.0)[2] > 0.9
    assert 0.35 < one(logit(1.0 - (1.0 - depth_of(-1.0)) ** 2))[0] < 0.65


def test_what_is_hardly_ever_seen_is_the_less_likely_the_airs():
    """Unlisted features are counted as seen; the air's line must show first."""
    plain, faint = one(-1.0, there=0.0)[2], one(-1.0, there=0.0, shows=0.05)[2]
    assert faint / (1.0 - faint) == pytest.approx(20.0 * plain / (1.0 - plain), rel=0.35)


def test_weak_lines_grow_in_proportion():
    """Below where half the lines show, the seen ones are those that noise lifts: there the
    expected depth falls with the opacity, ten times in a dex."""
    curve = threshold_form(0.9, 0.0)
    flat = StrengthRelation(np.maximum(-1.3, 0.8 * CENTRES - 1.3), 0.1)
    low = alone(flat, curve, np.array([-2.0, -1.0]))
    assert low[1] - low[0] == pytest.approx(1.0)
    assert alone(flat, curve, np.array([2.0]))[0] == pytest.approx(flat(2.0))


def test_what_the_air_does_not_touch_stays_as_it_was():
    class Solution:
        probability = np.array([0.0, 0.6])
        unlisted = np.array([0.4])
        feature = entry = np.array([0, 0])

        class problem:
            features = [0]

            class entries:
                population = np.array([1, 0])

    Solution.entry = np.array([0, 1])
    shares = _as_before(Solution, np.array([0]), np.array([[0.1, 0.0, 0.9]]))
    assert shares[0] == pytest.approx([0.1, 0.54, 0.36])


def test_what_it_did_to_the_odds_is_told_apart():
    """A fifth term beside the four, all of them multiplying to the odds."""
    weights = Breakdown(0.6, 5.2, 1.1, -0.7, 0.006, 0.004, 0.0, 0.1, 0.15, 0.8, 0.1, -0.5, 1.0, -1.5)
    line = Candidate("H2O", "telluric", 7000.0, 0.001, 0.1, np.nan, 0.0, 0.4, 1.0, 0.2, 0.1, "x",
                     tuple(weights))  # fmt: skip
    told = terms(line)
    assert [t.name for t in told][-1] == "star and air" and "4.5 times against" in told[-1].words
    assert sum(t.log for t in told) == pytest.approx(weights.log_odds)
    assert len(terms(replace(line, weights=tuple(weights._replace(between=0.0))))) == 4


def test_nothing_is_weighed_where_the_airs_depths_are_not_known():
    """Two of the air's lines in an emission spectrum tell nothing of how deep its others are."""
    entries = SimpleNamespace(population=np.array([1, 1, 0]))
    problem = SimpleNamespace(entries=entries, features=None)
    solution = SimpleNamespace(
        problem=problem, entry=np.arange(3), probability=np.array([0.9, 0.4, 0.1])
    )
    assert shared_between(solution) is solution
