"""Slopes and jumps of velocity along a spectrum, put into offsets whose scatter is known."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.claims.drift import MIN_FOR_DRIFT, Offsets, drift, jump

SIGMA = 0.25  # km/s


def made(count: int, seed: int, tilt: float = 0.0, step: float = 0.0, segments: int = 1):
    """Offsets over 5000-6000 A; ``step`` km/s in 5400-5500 A."""
    rng = np.random.default_rng([8, seed])
    wave = np.sort(rng.uniform(5000.0, 6000.0, count))
    velocity = rng.normal(0, SIGMA, count) + tilt * (wave - 5500.0) / 1000.0
    velocity += step * ((wave > 5400.0) & (wave < 5500.0))
    segment = ((wave - 5000.0) // (1000.0 / segments)).astype(int)
    return Offsets(wave, velocity, np.full(count, SIGMA), segment)


def test_the_slope_and_its_error_come_true():
    pulls = []
    for seed in range(200):
        slope, error = drift(made(300, seed, tilt=1.0))
        pulls.append((slope - 1.0) / error)
    # 200 draws: the mean of unit pulls is known to 0.07, their width to 0.05
    assert abs(np.mean(pulls)) < 0.25 and 0.8 < np.std(pulls) < 1.15


def test_chance_makes_no_jump():
    sigmas = [jump(made(300, seed)).sigmas for seed in range(200)]
    assert max(sigmas) < 6.0


@pytest.mark.parametrize("segments", [1, 10])
def test_half_a_km_s_in_one_order_is_found_where_it_is(segments):
    for seed in range(20):
        found = jump(made(400, seed, step=0.5, segments=segments))
        assert found.sigmas > 6.0
        assert found.size == pytest.approx(0.5, abs=4 * found.error)
        # pieces hold at least 12 of 400 lines: 30 Angstrom
        overlap = min(found.high, 5500.0) - max(found.low, 5400.0)
        assert overlap > 40.0 and overlap > 0.7 * (found.high - found.low)


def test_few_lines_say_nothing():
    few = made(MIN_FOR_DRIFT - 1, 0, tilt=5.0, step=5.0)
    assert np.isnan(drift(few)).all() and jump(few).sigmas == 0.0
