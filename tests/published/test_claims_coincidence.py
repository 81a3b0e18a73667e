"""Coincidence statistics: tails.

Hartoog, Cowley & Cowley 1973, ApJ 182, 847 (the method); the table's rows are the Poisson
background p = 1 - exp(-2 d rho) with an exact binomial tail, computed from that formula.
"""

from __future__ import annotations

import numpy as np
import pytest

from linewright.claims.coincidence import poisson_binomial_tail, tail_of

COPIES = 20_000


def chance_evidence(rates, hits: int):
    """(copies, lines) evidence 1 where a copy hits, as often as ``rates`` says; the first row
    is the observed one."""
    evidence = np.zeros((COPIES + 1, len(rates)))
    for k, rate in enumerate(rates):
        evidence[1 : 1 + round(rate * COPIES), k] = 1.0
    evidence[0, :hits] = 1.0
    return evidence


@pytest.mark.parametrize(
    ("density", "tolerance", "lines", "hits", "tail"),
    [(1.0, 0.06, 50, 18, 4.49e-6), (0.5, 0.05, 30, 6, 2.90e-3), (2.0, 0.10, 100, 45, 8.07e-3)],
)
def test_tail_of_chance_hits(density, tolerance, lines, hits, tail):
    p = 1.0 - np.exp(-2.0 * tolerance * density)
    evidence = chance_evidence(np.full(lines, p), hits)
    # the observed row counts among the copies: 1 in 20,001
    assert tail_of(evidence, np.ones(evidence.shape, bool)) == pytest.approx(tail, rel=0.015)
    assert poisson_binomial_tail(np.full(lines, p), hits) == pytest.approx(tail, rel=3e-3)


def test_unequal_rates_agree_with_simulation():
    """Lines that differ lean with half their weight on all lines' distribution."""
    rng = np.random.default_rng(2)
    rates = rng.uniform(0.02, 0.5, 40)
    leaning = 0.5 * rates + 0.5 * rates.mean()
    counts = (rng.random((200_000, 40)) < leaning).sum(axis=1)
    assert poisson_binomial_tail(leaning, 17) == pytest.approx(np.mean(counts >= 17), rel=0.05)
    evidence = chance_evidence(rates, 17)
    tail = tail_of(evidence, np.ones(evidence.shape, bool))
    assert tail == pytest.approx(np.mean(counts >= 17), rel=0.05)


def test_a_tail_is_no_smaller_than_the_copies_can_tell():
    """One line in place, none of 100 copies: 1 in 101 by the permutation rule."""
    evidence = np.zeros((101, 1))
    evidence[0] = 5.0
    assert tail_of(evidence, np.ones((101, 1), bool)) == pytest.approx(1 / 101, rel=1e-6)


def test_copies_outside_what_was_searched_do_not_count():
    evidence = np.zeros((101, 1))
    evidence[0] = 5.0
    searched = np.arange(101)[:, None] <= 20
    assert tail_of(evidence, searched) == pytest.approx(1 / 21, rel=1e-6)
