"""Strong lines taken as one profile: what happens where the fit knows no depth."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np

from linewright.measure.strong import _Line, _rows, _View


def rows_with_error(error):
    """Rows of one Voigt profile of depth 0.6 whose parameters have this error."""
    x = np.linspace(6560.0, 6566.0, 301)
    view = _View(x, np.zeros(301), np.full(301, 0.01), 1.0, 0.2)
    line = _Line("voigt", np.array([0.6, 6563.0, -1.0, -1.5]), 0.0, np.eye(4) * error**2)
    trace = SimpleNamespace(wave=x, level_err=np.zeros(301))
    nodes = SimpleNamespace(continuum_at=np.ones_like)
    old = SimpleNamespace(
        wave=np.array([6563.0]), significance=np.array([50.0]), segment=np.array([0]),
        sign=np.array([1], dtype=np.int8),
    )
    ready = SimpleNamespace(trace=trace, nodes=nodes)
    return _rows(line, view, ready, SimpleNamespace(take=lambda which: old), slice(None))


def test_a_fit_without_a_sure_depth_gives_no_rows():
    """Three sigma of depth is what a row needs; a fit that did not settle may know none."""
    assert rows_with_error(1.0) is None


def test_a_sure_line_gives_a_row():
    table = rows_with_error(0.01)
    assert len(table) == 1 and abs(table.depth[0] - 0.6) < 1e-9
