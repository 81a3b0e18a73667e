"""Identifications of a K giant hidden and found again.

Truth: Hinkle, Wallace, Valenti & Harmer 2000, Visible and Near Infrared Atlas of the
Arcturus Spectrum 3727-9300 A, Appendix I. Goals: the method's first column.
"""

from __future__ import annotations

import numpy as np
import pytest
from truths import KGIANT_COVERAGE, PUBLISHED, kgiant_table, seen_ranges

from linewright.claims.voting import DECLARE_MARGIN
from linewright.job.options import SolveOptions
from linewright.job.solve import solve_features

pytestmark = pytest.mark.skipif(
    not PUBLISHED.is_dir(), reason="published identifications are not beside the checkout"
)


def named_right(session, truth):
    """(strict, blend-tolerant, confident) per feature."""
    strict = np.array([c.species == t for c, t in zip(session.claims, truth)])
    tolerant = strict | np.array(
        [any(b[0] == t for b in c.blend) for c, t in zip(session.claims, truth)]
    )
    sure = np.array([c.probability >= 0.95 for c in session.claims])
    return strict, tolerant, sure


@pytest.fixture(scope="module")
def blind():
    features, truth = kgiant_table(np.random.default_rng(11), velocity=-57.3)
    return solve_features(features, options=SolveOptions(coverage=seen_ranges(KGIANT_COVERAGE, -57.3))), truth


def test_blind_velocity_is_found_and_declared(blind):
    session, _ = blind
    assert session.velocity.margin > DECLARE_MARGIN
    assert session.velocity.velocity == pytest.approx(-57.3, abs=0.2)


def test_top_one_agreement(blind):
    session, truth = blind
    strict, tolerant, _ = named_right(session, truth)
    real = truth != ""
    assert strict[real].mean() >= 0.90
    assert tolerant[real].mean() >= 0.92


def test_confident_claims_agree(blind):
    session, truth = blind
    _, tolerant, sure = named_right(session, truth)
    real = truth != ""
    assert sure[real].mean() >= 0.55
    assert tolerant[sure].mean() >= 0.98  # invented features count as wrong


def test_few_invented_features_are_made_confident(blind):
    session, truth = blind
    _, _, sure = named_right(session, truth)
    invented = truth == ""
    assert np.sum(sure & invented) <= 0.05 * np.sum(invented) + 3


@pytest.mark.parametrize("kept", [20, 50, 200])
def test_scattered_tables_stay_modest(kept):
    """Without coverage absence is no evidence: at most 8 % of invented features firm."""
    sure = total = 0
    for seed in range(4):
        features, truth = kgiant_table(np.random.default_rng(seed), keep=kept)
        session = solve_features(features, options=SolveOptions(velocity=0.0))
        invented = truth == ""
        total += int(np.sum(invented))
        sure += sum(c.probability >= 0.95 for c, bad in zip(session.claims, invented) if bad)
    assert total >= 8
    assert sure <= max(1, round(0.08 * total))
