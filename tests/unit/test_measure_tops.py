"""The Balmer jump of an A star, and bright Balmer lines without one.

Wavelengths of the series from the Rydberg formula; the star is invented.
"""

from __future__ import annotations

import numpy as np
import pytest
from measure_simulation import spectrum_of

from linewright.measure.core import measure_spectrum
from linewright.measure.detect import run_filters

WAVE = 3300 + 2.0 * np.arange(1600)
LIMIT = 3647.04  # vacuum Angstrom, 4 / R_H


def _series(depth: float, width: float, last: int = 200):
    """Lines of upper level 3 to ``last``, ever narrower, merging before the limit."""
    y = np.zeros(len(WAVE))
    for n in range(3, last):
        centre = LIMIT / (1 - 4 / n**2)
        narrow = width * min(1.0, 8.0 / n)
        y = 1 - (1 - y) * (1 - depth * np.exp(-0.5 * ((WAVE - centre) / narrow) ** 2))
    return y


@pytest.fixture(scope="module")
def a_star():
    jump = np.where(WAVE < LIMIT, 0.4, 1.0) * (WAVE / 4000) ** -3
    rng = np.random.default_rng(3)
    flux = jump * (1 - _series(0.6, 9.0)) * (1 + 0.003 * rng.standard_normal(len(WAVE)))
    return measure_spectrum(spectrum_of(WAVE, flux))


def test_lines_towards_the_limit_are_troughs(a_star):
    f = a_star.features
    for n in range(4, 10):
        centre = LIMIT / (1 - 4 / n**2)
        k = np.argmin(np.abs(f.wave - centre))
        assert abs(f.wave[k] - centre) < 4.0, n
        assert f.depth[k] > 0.25, n


def test_the_tops_between_them_are_no_peaks(a_star):
    f = a_star.features
    assert not np.any(f.depth < -0.1)


def test_bright_lines_towards_the_limit_lift_no_continuum():
    """Emission lines as high as the continuum, on one that knows no jump."""
    rng = np.random.default_rng(4)
    flux = (1 + _series(0.9, 3.0, last=24)) * (1 + 0.01 * rng.standard_normal(len(WAVE)))
    measured = measure_spectrum(spectrum_of(WAVE, flux))
    level = measured.segments[0].continuum_at(WAVE)
    away = WAVE > 3760
    assert np.percentile(np.abs(level - 1)[away], 90) < 0.05


def _filters(y, level_err):
    n = len(y)
    return run_filters(y, np.full(n, 0.001), np.ones(n, bool), np.full(n, 6.0), np.array([1.0]),
                       np.full(n, level_err))  # fmt: skip


@pytest.mark.parametrize(("sign", "seen"), [(1, True), (-1, False)])
def test_a_sharp_trough_is_seen_under_a_vague_continuum_and_a_bump_is_not(sign, seen):
    x = np.arange(400)
    wings = 0.3 * np.exp(-0.5 * ((x - 60) / 20.0) ** 2)  # a broad line, so absorption prevails
    y = wings + sign * 0.03 * np.exp(-0.5 * ((x - 250) / 2.5) ** 2)
    y += 0.001 * np.random.default_rng(5).standard_normal(400)
    assert (np.abs(_filters(y, 0.02).level[248:253]).max() > 8.0) == seen
