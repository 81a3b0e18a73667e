"""Which line of a blend is its main one, and what an absent line says."""

from types import SimpleNamespace

import numpy as np
import pytest
from scipy.special import ndtr

from linewright.claims.curves import CENTRES, DetectionCurve, StrengthRelation
from linewright.claims.entries import Neighbourhood
from linewright.claims.hidden import absence, share_above
from linewright.claims.populations import STELLAR, strengths
from linewright.claims.strength_errors import FIRST_SPREAD, learn_spread
from linewright.lines.loading import load_catalogue


def _first(strength, error):
    count = len(strength)
    near = Neighbourhood(
        5000.0 + 0.001 * np.arange(count), np.full(count, STELLAR), np.full(count, 0.1), (STELLAR,)
    )
    return near.groups(np.asarray(strength, float), np.asarray(error, float)).first


@pytest.mark.parametrize("apart", [0.0, 0.1, 0.5, 1.0, 1.5])
def test_of_two_lines_the_stronger_is_main_with_the_normal_integral(apart):
    """Phi(d/s), elementary; the logistic curve is within 0.01 of it."""
    found = _first([0.3 + apart, 0.3], [0.3, 0.4])
    assert found.sum() == pytest.approx(1.0)
    assert found[0] == pytest.approx(ndtr(apart / 0.5), abs=0.01)


def test_of_several_lines_the_chances_are_those_of_a_draw():
    """Against 200,000 draws of the errors; the odds against the strongest alone are an
    approximation, whose own error here is a few hundredths."""
    strength, error = np.array([1.0, 0.8, 0.5, 0.0]), np.array([0.3, 0.3, 0.3, 0.3])
    drawn = strength + error * np.random.default_rng(1).normal(size=(200_000, 4))
    share = np.bincount(np.argmax(drawn, axis=1), minlength=4) / len(drawn)
    assert _first(strength, error) == pytest.approx(share, abs=0.05)


def test_a_line_of_doubtful_strength_is_a_rival_for_longer():
    sure, doubtful = _first([0.5, 0.0], [0.2, 0.2]), _first([0.5, 0.0], [0.2, 0.8])
    assert sure[1] < 0.06 and doubtful[1] > 0.2


def test_lines_of_populations_without_errors_keep_their_softened_share():
    near = Neighbourhood(np.array([5000.0, 5000.01]), np.array([3, 3]), np.full(2, 0.1), (STELLAR,))
    made = near.groups(np.array([0.5, 0.0]), np.full(2, 0.1))
    assert made.first == pytest.approx(made.share)


def _round(strength, measured):
    """A round in which every line made its feature; measured: strengths, NaN unknown."""
    n = len(strength)
    graded = np.arange(n)[np.isfinite(measured)]
    block = SimpleNamespace(graded=graded, pairs=np.arange(n), population=STELLAR)
    pairs = SimpleNamespace(entry=np.arange(n), m=measured, m_variance=np.full(n, 0.02**2))
    step = SimpleNamespace(
        marginals=SimpleNamespace(pair=np.ones(n)), groups=SimpleNamespace(total=strength)
    )
    return block, pairs, step


def test_the_spread_of_strengths_is_read_off_measured_depths():
    rng = np.random.default_rng(2)
    strength, gf = rng.uniform(-1.0, 2.0, 4000), 0.1
    true = strength + rng.normal(0, np.hypot(0.3, gf), len(strength))
    block, pairs, step = _round(strength, 0.6 * true + rng.normal(0, 0.02, len(strength)))
    problem = SimpleNamespace(entries=strength, loggf_err=np.full(len(strength), gf))
    relation = StrengthRelation(0.6 * CENTRES, 0.2)
    found = learn_spread(problem, pairs, step, (block, DetectionCurve(ndtr(CENTRES)), relation))
    assert found == pytest.approx(0.3, rel=0.05)


def test_positions_alone_give_the_spread_by_how_gently_lines_begin_to_show():
    strength = np.linspace(-1, 2, 50)
    block, pairs, step = _round(strength, np.full(50, np.nan))
    problem = SimpleNamespace(entries=strength, loggf_err=np.full(50, 0.25))
    curve = DetectionCurve(0.9 * ndtr((CENTRES - 0.2) / 0.65))
    found = learn_spread(problem, pairs, step, (block, curve, StrengthRelation(CENTRES, 0.2)))
    assert found == pytest.approx(0.6, abs=0.03)
    assert FIRST_SPREAD == pytest.approx(0.49, abs=0.01)


def _absence(apart, measured, above=None):
    """Chance that a line of strength 0, shown with 0.8 where nothing hides it, is not seen."""
    pairs = SimpleNamespace(
        entry=np.array([0]), own=np.array([apart]), covered=np.ones(1), m=np.array([measured]),
        m_variance=np.zeros(1), blocks=[SimpleNamespace(population=STELLAR, pairs=np.array([0]))],
    )  # fmt: skip
    problem = SimpleNamespace(complete=True, group_half_width=np.array([0.05]))
    state = SimpleNamespace(above=above, relation=(StrengthRelation(CENTRES, 0.2),))
    groups = SimpleNamespace(total=np.array([0.0]))
    return float(absence(problem, pairs, state, groups, np.array([0.8]))[0])


def test_a_line_hides_in_a_deeper_feature_beside_it_and_nowhere_else():
    assert _absence(0.02, 2.0) > 0.99
    assert _absence(0.02, -1.0) == pytest.approx(0.2, abs=0.01)
    assert _absence(0.2, 2.0) == pytest.approx(0.2)
    # A feature of twice the line's own strength is even odds.
    assert _absence(0.02, np.log10(2.0)) == pytest.approx(0.6, abs=0.01)


def test_without_depths_a_strong_line_is_harder_to_hide():
    above = share_above(np.repeat(CENTRES, 3), np.ones(3 * len(CENTRES)))
    assert np.all(np.diff(above) < 0)
    assert above[len(CENTRES) // 2] == pytest.approx(0.25, abs=0.02)
    assert _absence(0.02, np.nan, above) > 0.2


def test_a_forbidden_line_from_two_sources_is_one_line():
    catalogue = load_catalogue().between(6301.0, 6303.0)
    made = strengths(catalogue, STELLAR, np.zeros(len(catalogue)))
    oxygen = [
        str(catalogue.species_of(i)) for i in np.nonzero(np.isfinite(made))[0]
        if "O I" in catalogue.species_of(i) and abs(catalogue.wave[i] - 6302.046) < 0.02
    ]  # fmt: skip
    assert oxygen == ["[O I]"]
