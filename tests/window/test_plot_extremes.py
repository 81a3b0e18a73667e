"""Reduction to pixel columns: compared with a plain search through the samples."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from linewright.window.plot.extremes import (
    PYRAMID_ABOVE,
    Extremes,
    PixelScale,
    Pyramid,
    find_breaks,
)

SUN = Path(__file__).resolve().parents[2].parent / "shared" / "spectra" / "sun_r47000.txt"


def plain(x, y, scale: PixelScale) -> dict[int, tuple]:
    """Column -> (first, low, high, last) by visiting each column's samples."""
    edges = scale.edges()
    found = {}
    for k in range(len(edges) - 1):
        inside = y[(x >= edges[k]) & (x < edges[k + 1])]
        if len(inside):
            finite = inside[np.isfinite(inside)]
            low, high = (finite.min(), finite.max()) if len(finite) else (np.nan, np.nan)
            found[scale.first_column() + k] = (inside[0], low, high, inside[-1])
    return found


def compare(x, y, scale: PixelScale) -> None:
    columns = Extremes(x, y).columns(scale)
    wanted = plain(x, y, scale)
    last = scale.first_column() + len(scale.edges()) - 1
    rows = [i for i, c in enumerate(columns.column) if scale.first_column() <= c < last]
    assert [int(columns.column[i]) for i in rows] == sorted(wanted)
    assert np.all(np.diff(columns.column) > 0)
    for i in rows:
        got = (columns.first[i], columns.low[i], columns.high[i], columns.last[i])
        np.testing.assert_array_equal(got, wanted[int(columns.column[i])])


def sampled(count: int, seed: int, nan_share: float = 0.0):
    rng = np.random.default_rng(seed)
    x = np.cumsum(rng.choice([0.01, 0.02, 0.5], count, p=[0.6, 0.39, 0.01]))
    y = rng.standard_normal(count)
    y[rng.random(count) < nan_share] = np.nan
    return x, y


@pytest.mark.parametrize("origin, width", [(0.0, 300.0), (58.37, 411.5), (1234.999, 77.77)])
@pytest.mark.parametrize("nan_share", [0.0, 0.2, 0.97])
def test_no_extreme_of_any_column_is_lost(origin, width, nan_share):
    x, y = sampled(20_000, 1, nan_share)
    compare(x, y, PixelScale(x[500], x[-700], origin, width))


@example(count=2, seed=1, origin=0.0, width=1.0, ends=(0.0, -0.1875))  # sample on the border
@settings(max_examples=60, deadline=None)
@given(
    count=st.integers(1, 400),
    seed=st.integers(0, 999),
    origin=st.floats(0, 2000),
    width=st.floats(1, 900),
    ends=st.tuples(st.floats(-0.2, 1.2), st.floats(-0.2, 1.2)),
)
def test_any_view_of_any_sampling(count, seed, origin, width, ends):
    x, y = sampled(count, seed, 0.1)
    span = x[-1] - x[0] + 0.01
    low, high = sorted(x[0] + span * np.array(ends))
    if high - low > 1e-6:
        compare(x, y, PixelScale(low, high, origin, width))


def test_the_pyramid_loses_nothing_in_a_long_spectrum():
    x, y = sampled(int(1.5 * PYRAMID_ABOVE), 3, 0.001)
    reduced = Extremes(x, y)
    scale = PixelScale(x[0], x[-1], 66.25, 901.3)
    columns = reduced.columns(scale)
    assert reduced._pyramid is not None, "the view was to be wide enough for the pyramid"
    bounds = np.searchsorted(x, scale.edges())
    for k, (start, stop) in enumerate(zip(bounds[:-1], bounds[1:])):
        if stop > start:
            at = np.nonzero(columns.column == scale.first_column() + k)[0]
            assert columns.low[at] == np.nanmin(y[start:stop])
            assert columns.high[at] == np.nanmax(y[start:stop])


@settings(max_examples=40, deadline=None)
@given(seed=st.integers(0, 999), count=st.sampled_from([17, 4_000, 70_001, 300_003]))
def test_pyramid_ranges(seed, count):
    rng = np.random.default_rng(seed)
    y = rng.standard_normal(count)
    y[rng.random(count) < 0.05] = np.nan
    start = rng.integers(0, count - 1, 25)
    stop = np.minimum(start + 1 + rng.integers(0, count, 25) // rng.integers(1, 900), count)
    low, high = Pyramid(y).extremes(start, stop)
    for i, (a, b) in enumerate(zip(start, stop)):
        finite = y[a:b][np.isfinite(y[a:b])]
        np.testing.assert_array_equal(low[i], finite.min() if len(finite) else np.nan)
        np.testing.assert_array_equal(high[i], finite.max() if len(finite) else np.nan)


def test_columns_are_device_pixels_of_the_view():
    scale = PixelScale(5000.0, 5010.0, 66.4, 500.3)
    x = np.sort(np.random.default_rng(2).uniform(5000.1, 5009.9, 300))
    columns = Extremes(x, np.arange(300.0)).columns(scale)
    column_of_first = dict(zip(columns.first, columns.column))
    for value, column in column_of_first.items():
        assert np.floor(scale.pixels(x[int(value)])) == column


def test_a_gap_breaks_the_line_but_uneven_sampling_does_not():
    steps = np.full(400, 0.01)
    steps[200] = 0.2
    assert find_breaks(np.cumsum(steps)).tolist() == [200]
    assert len(find_breaks(np.geomspace(3000, 9000, 5000))) == 0
    dense_then_sparse = np.concatenate([np.full(300, 0.001), np.full(300, 0.3)])
    assert len(find_breaks(np.cumsum(dense_then_sparse))) == 0
    one_missing = np.full(400, 0.01)
    one_missing[100] = 0.02
    assert len(find_breaks(np.cumsum(one_missing))) == 0


def test_a_lone_sample_between_two_gaps_is_cut_on_both_sides():
    x = np.concatenate([np.arange(0, 1, 0.01), [2.0], np.arange(3, 4, 0.01)])
    assert find_breaks(x).tolist() == [100, 101]


def test_lines_do_not_cross_gaps_or_missing_values():
    x = np.concatenate([np.arange(0, 10, 0.01), np.arange(20, 30, 0.01)])
    y = np.ones(len(x))
    y[300:420] = np.nan
    columns = Extremes(x, y).columns(PixelScale(0, 30, 0.0, 60.0))
    joined = dict(zip(columns.column.tolist(), columns.joined.tolist()))
    assert not joined[40]  # first column after the gap at 10-20
    assert joined[41] and joined[2]
    assert not any(joined[c] for c in (7, 8) if c in joined)  # inside the NaN run 3.0-4.2
    runs = Extremes(x, y).runs(0, len(x))
    assert runs == [(0, 300), (420, 1000), (1000, 2000)]


@pytest.mark.skipif(not SUN.is_file(), reason="the shared solar spectrum is not here")
def test_gaps_of_the_sun():
    """Rows are missing over 5759.5-5827.8 and 6066-6074 A (description of the file)."""
    x = np.unique(np.loadtxt(SUN, usecols=0))
    breaks = find_breaks(x)
    wide = [(x[i - 1], x[i]) for i in breaks]
    assert any(a < 5760.0 and b > 5827.0 for a, b in wide)
    assert any(a < 6067.0 and b > 6073.0 for a, b in wide)
    assert len(breaks) <= 6, wide
    assert not any(4960.9 < a < 4961.1 for a, _ in wide)  # one missing sample is no gap


def test_bad_input_is_refused():
    with pytest.raises(ValueError, match="ascending"):
        Extremes([2.0, 1.0], [0.0, 0.0])
    with pytest.raises(ValueError, match="equal length"):
        Extremes([1.0, 2.0], [0.0])
