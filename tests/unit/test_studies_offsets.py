"""What the species of a star share is its zero point, and no odd species may set it."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.claims.offsets import LINES_FOR_ZERO, shared_offset


def test_a_common_shift_is_found_whole():
    assert shared_offset(np.full(6, 1.3), np.array([300, 40, 30, 20, 8, 2])) == pytest.approx(1.3)


def test_an_odd_species_does_not_move_it_however_many_lines_it_has():
    """Ten normal species about 0, one of +2 dex with more lines than all of them."""
    offset = np.array([0.05, -0.1, 0.0, 0.1, -0.05, 0.08, -0.02, 0.0, 0.03, -0.09, 2.0])
    lines = np.array([60, 25, 20, 15, 15, 10, 10, 8, 8, 5, 400.0])
    assert abs(shared_offset(offset, lines)) < 0.15
    assert np.average(offset, weights=lines) > 1.0  # what a plain mean would say


def test_few_lines_have_no_zero_point():
    assert shared_offset(np.array([1.0, 1.0]), np.array([LINES_FOR_ZERO / 2 - 1, 2.0])) == 0.0
