"""The engine's parts against results worked out another way."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from linewright.claims.association import associate
from linewright.claims.curves import CENTRES, learn_detection, learn_relation, threshold_form
from linewright.claims.curves import StrengthRelation
from linewright.claims.entries import ABSORPTION, SHARE_EXPONENT, group
from linewright.claims.model import standing_of
from linewright.claims.offsets import GRID, best_offsets, detection_log_likelihood
from linewright.claims.pairs import Block
from linewright.claims.species_offsets import Evidence, without_own
from linewright.claims.voting import line_weights, vote
from linewright.spectra.medium import C_KM_S


def exact_marginals(odds):
    """Marginals by enumerating every matching of features (rows) and lines (columns)."""
    n_feature, n_line = odds.shape
    total, weight_sum = np.zeros_like(odds), 0.0
    for choice in itertools.product(range(-1, n_line), repeat=n_feature):
        used = [c for c in choice if c >= 0]
        if len(set(used)) != len(used):
            continue
        weight = np.prod([odds[f, c] for f, c in enumerate(choice) if c >= 0])
        weight_sum += weight
        for f, c in enumerate(choice):
            if c >= 0:
                total[f, c] += weight
    return total / weight_sum


@pytest.mark.parametrize("seed", range(5))
def test_association_is_near_the_exact_marginals(seed):
    rng = np.random.default_rng(seed)
    odds = 10 ** rng.uniform(-1.5, 1.5, (4, 4))
    f, i = np.meshgrid(np.arange(4), np.arange(4), indexing="ij")
    found = associate(f.ravel(), i.ravel(), odds.ravel(), (4, 4))
    exact = exact_marginals(odds)
    assert np.abs(found.pair.reshape(4, 4) - exact).max() < 0.12  # loopy: near, not equal
    assert found.unlisted == pytest.approx(1 - found.pair.reshape(4, 4).sum(axis=1))


def test_association_is_exact_without_loops():
    """One line wanted by two features: a tree, on which belief propagation is exact."""
    found = associate(np.array([0, 1]), np.array([0, 0]), np.array([9.0, 3.0]), (2, 1))
    assert found.pair == pytest.approx([9 / 13, 3 / 13], abs=1e-6)
    assert found.missing == pytest.approx([1 / 13], abs=1e-6)


def test_shares_totals_and_centroids_of_a_blend():
    wave = np.array([5000.00, 5000.03, 5001.0])
    strength = np.array([1.0, 0.0, 0.5])
    made = group(wave, strength, np.zeros(3, int), np.full(3, 0.05))
    soft = 10 ** (SHARE_EXPONENT * strength)
    assert made.share[:2] == pytest.approx(soft[:2] / soft[:2].sum())
    assert made.share[2] == 1.0
    assert made.total[0] == pytest.approx(np.log10(11.0))
    assert made.centroid[0] == pytest.approx(5000.0 + 0.03 / 11.0)


def test_only_one_population_shares():
    made = group(np.array([5000.0, 5000.01]), np.zeros(2), np.array([0, 1]), np.full(2, 0.05))
    assert made.share == pytest.approx([1.0, 1.0])


def test_detection_curve_recovers_the_truth():
    rng = np.random.default_rng(3)
    strength = rng.uniform(-3, 3, 20000)
    truth = threshold_form(0.9, 0.4)
    seen = (rng.random(20000) < truth(strength)).astype(float)
    learned = learn_detection(strength, seen, np.ones(20000), float(seen.sum()))
    inside = (CENTRES > -2.5) & (CENTRES < 2.8)
    assert np.abs(learned.value - truth.value)[inside].max() < 0.06
    few = learn_detection(strength[:600], seen[:600], np.ones(600), 100.0)
    assert np.abs(few.value - truth.value)[inside].max() < 0.2


def test_strength_relation_recovers_slope_and_scatter():
    rng = np.random.default_rng(4)
    strength = rng.uniform(-1, 2.5, 4000)
    measured = 0.7 * strength - 1.0 + rng.normal(0, 0.2, 4000)
    start = StrengthRelation(0.0 * CENTRES, 0.5)
    learned = learn_relation(strength, measured, np.ones(4000), start)
    at = np.array([-0.5, 0.5, 1.5])
    assert learned(at) == pytest.approx(0.7 * at - 1.0, abs=0.06)
    assert learned.scatter == pytest.approx(0.2, abs=0.02)


def test_species_offset_is_recovered_and_absence_pushes_down():
    rng = np.random.default_rng(5)
    curve = threshold_form(0.95, 0.0)
    strength = rng.uniform(-1.5, 1.5, 400)
    seen = (rng.random(400) < curve(strength + 1.0)).astype(float)
    table = detection_log_likelihood(
        strength, seen, np.ones(400), np.zeros(400, int), 2, curve
    )
    mean, error = best_offsets(table)
    assert mean[0] == pytest.approx(1.0, abs=3 * error[0])
    assert mean[1] == pytest.approx(0.0, abs=1e-9)  # no line, no news
    absent = detection_log_likelihood(
        np.full(20, 0.5), np.zeros(20), np.ones(20), np.zeros(20, int), 1, curve
    )
    assert best_offsets(absent)[0][0] < -1.0
    assert GRID[0] < -2.5


def test_vote_finds_the_velocity_and_refuses_chance():
    rng = np.random.default_rng(6)
    lines = np.sort(rng.uniform(5000, 6000, 400))
    weight = line_weights(-np.arange(400.0), 60)
    chosen = lines[rng.choice(60, 25, replace=False)]
    wave = chosen * (1 + 123.4 / C_KM_S) + rng.normal(0, 0.01, 25)
    found = vote((wave, np.full(25, 0.01)), (lines, weight), (-500, 500))
    assert found.declared
    assert found.velocity == pytest.approx(123.4, abs=0.4)
    noise = vote(
        (np.sort(rng.uniform(5000, 6000, 300)), np.full(300, 0.01)), (lines, weight), (-500, 500)
    )
    assert not noise.declared


@pytest.mark.parametrize(
    ("p", "standing"),
    [(0.95, "firm"), (0.9499, "likely"), (0.80, "likely"), (0.7999, "tentative"),
     (0.50, "tentative"), (0.4999, "unclaimed"), (float("nan"), "unclaimed")],
)  # fmt: skip
def test_standing_by_the_contract(p, standing):
    assert standing_of(p) == standing


def test_signs_are_plus_for_absorption():
    assert ABSORPTION == 1


def test_a_main_line_is_at_least_as_strong_as_any_other_of_its_blend():
    """If the weak line of a pair is the main one, it has half of the blend at least."""
    wave = np.array([5000.00, 5000.03])
    made = group(wave, np.array([1.0, 0.0]), np.zeros(2, int), np.full(2, 0.05))
    assert made.lead == pytest.approx([10 / 11, 0.5])


def test_groups_agree_with_sums_taken_one_by_one():
    rng = np.random.default_rng(7)
    wave = np.sort(rng.uniform(5000, 5002, 60))
    strength, half = rng.uniform(-3, 2, 60), rng.uniform(0.03, 0.2, 60)
    made = group(wave, strength, np.zeros(60, int), half)
    for i in range(60):
        near = np.abs(wave - wave[i]) <= half[i]
        power = 10.0 ** strength[near]
        raised = power.max()
        assert made.total[i] == pytest.approx(np.log10(power.sum()))
        assert made.lead[i] == pytest.approx(raised / (power.sum() - 10.0 ** strength[i] + raised))
        centroid = np.sum(power * wave[near]) / power.sum()
        assert made.centroid[i] == pytest.approx(centroid, abs=1e-6)


def test_a_line_does_not_vouch_for_its_own_species():
    """A species of one line that shows far too strong: its offset follows the line, but the
    line itself is weighed as if nothing were known of the species."""
    curve, one, none = threshold_form(0.9, 0.0), np.zeros(1, int), np.zeros(0)
    block = Block(0, one, one, one, one, one, one)
    measured = (none, none, 0.2, none)
    evidence = Evidence(
        block, np.array([-2.0]), np.ones(1), np.ones(1), curve, np.zeros(0, int), measured
    )
    table = detection_log_likelihood(
        evidence.strength, evidence.hits, evidence.tries, one, 1, curve
    )
    mean, error = best_offsets(table)
    entries, alone = without_own(evidence, table, error, np.ones(1))
    assert mean[0] > 0.4
    assert entries.tolist() == [0]
    assert alone[0] == pytest.approx(0.0, abs=1e-9)
