"""Coincidence statistics: exact tails.

Hartoog, Cowley & Cowley 1973, ApJ 182, 847 (the method); the table's rows are the Poisson
background p = 1 - exp(-2 d rho) with an exact binomial tail, computed from that formula.
"""

from __future__ import annotations

import numpy as np
import pytest

from linewright.claims.roll_call import poisson_binomial_tail


@pytest.mark.parametrize(
    ("density", "tolerance", "lines", "hits", "tail"),
    [(1.0, 0.06, 50, 18, 4.49e-6), (0.5, 0.05, 30, 6, 2.90e-3), (2.0, 0.10, 100, 45, 8.07e-3)],
)
def test_tail_of_chance_hits(density, tolerance, lines, hits, tail):
    p = 1.0 - np.exp(-2.0 * tolerance * density)
    assert poisson_binomial_tail(np.full(lines, p), hits) == pytest.approx(tail, rel=3e-3)


def test_unequal_rates_agree_with_simulation():
    rng = np.random.default_rng(2)
    rates = rng.uniform(0.02, 0.5, 40)
    counts = (rng.random((200_000, 40)) < rates).sum(axis=1)
    assert poisson_binomial_tail(rates, 17) == pytest.approx(np.mean(counts >= 17), rel=0.05)
