"""The error of a refined velocity: blends go along in the mean and count for nothing in it."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pytest

from linewright.claims.velocity import refine
from linewright.spectra.medium import C_KM_S

LINES, WAVE, SIGMA, SHIFT = 400, 5000.0, 0.005, 0.4  # count, Angstrom, Angstrom, km/s


def solution(share, crowded):
    """Confident pairs displaced by SHIFT with normal scatter."""
    rows = np.arange(LINES)
    offset = SHIFT / (C_KM_S * SIGMA / WAVE) + np.random.default_rng(4).standard_normal(LINES)
    features = SimpleNamespace(wave=np.full(LINES, WAVE), crowded=crowded)
    entries = SimpleNamespace(component=np.zeros(LINES, int))
    return SimpleNamespace(
        problem=SimpleNamespace(features=features, entries=entries), feature=rows, entry=rows,
        probability=np.full(LINES, 0.9), offset_sigma=offset, sigma=np.full(LINES, SIGMA),
        groups=SimpleNamespace(share=share),
    )


def refined(clear: int):
    share = np.where(np.arange(LINES) < clear, 1.0, 0.6)
    return refine(solution(share, np.zeros(LINES, bool)), 0)


def test_lines_alone_give_the_error_of_a_mean():
    shift, error = refined(LINES)
    one = C_KM_S * SIGMA / WAVE
    assert shift == pytest.approx(SHIFT, abs=4 * error)
    assert error == pytest.approx(one / np.sqrt(LINES), rel=0.2)


def test_blends_do_not_make_it_smaller():
    """A quarter of the lines standing clear: twice the error, of the same mean."""
    assert refined(LINES // 4)[0] == pytest.approx(refined(LINES)[0])
    assert refined(LINES // 4)[1] == pytest.approx(2.0 * refined(LINES)[1], rel=0.1)


def test_without_any_line_alone_the_error_is_one_lines():
    disturbed = refine(solution(np.ones(LINES), np.ones(LINES, bool)), 0)[1]
    assert disturbed == pytest.approx(C_KM_S * SIGMA / WAVE, rel=0.2)
