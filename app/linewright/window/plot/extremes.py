"""Exact first, lowest, highest and last sample of every device-pixel column.

A spectrum with more samples than pixels is drawn from these four numbers per column:
nothing that a full drawing would touch is lost, and columns sit on the device pixels of
the view (whose origin and width are fractional), so nothing moves sideways.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

BLOCK = 16
PYRAMID_ABOVE = 600_000
GAP_FACTOR = 4.0
_TOP_LEVEL = 60_000


@dataclass(frozen=True)
class PixelScale:
    """Where x falls on device pixels: px = origin + (x - low) * width / (high - low).

    low, high: ends of the view; origin, width: of the view in device pixels, fractional.
    Column k holds px in [k, k + 1).
    """

    low: float
    high: float
    origin: float
    width: float

    @property
    def per_pixel(self) -> float:
        return (self.high - self.low) / self.width

    def pixels(self, x) -> np.ndarray:
        """Device-pixel position of x, fractional."""
        return self.origin + (np.asarray(x, dtype=float) - self.low) * (1.0 / self.per_pixel)

    def first_column(self) -> int:
        return int(np.floor(self.origin))

    def edges(self) -> np.ndarray:
        """x at the left edge of every column touched by the view, and at the last right edge."""
        last = int(np.ceil(self.origin + self.width))
        columns = np.arange(self.first_column(), last + 1)
        return self.low + (columns - self.origin) * self.per_pixel


@dataclass(frozen=True)
class Columns:
    """Columns holding at least one sample, ascending; all arrays of shape (m,).

    column: device-pixel column; the nearest sample on either side of the view is included
        as a column of its own outside, so that lines reach the border
    first, low, high, last: flux; NaN where a column holds only NaN
    joined: whether a line runs from the column before (no gap, no NaN between)
    """

    column: np.ndarray
    first: np.ndarray
    low: np.ndarray
    high: np.ndarray
    last: np.ndarray
    joined: np.ndarray


def find_breaks(x) -> np.ndarray:
    """Sample numbers i with a gap between i - 1 and i.

    A gap is a step above GAP_FACTOR times at least three of the four steps around it, so
    that neither logarithmic sampling nor a change from dense to sparse sampling is cut.
    """
    step = np.diff(x)
    if len(step) < 3:
        return np.zeros(0, dtype=np.int64)
    jump = GAP_FACTOR * step
    suspect = np.zeros(len(step), dtype=bool)
    suspect[1:] = step[1:] > jump[:-1]
    suspect[:-1] |= step[:-1] > jump[1:]
    where = np.nonzero(suspect)[0]
    around = where[:, None] + np.array([-2, -1, 1, 2])
    beyond = (around < 0) | (around >= len(step))
    smaller = step[where][:, None] > jump[np.clip(around, 0, len(step) - 1)]
    return where[np.sum(smaller | beyond, axis=1) >= 3] + 1


def _halve(rows: np.ndarray, pick) -> np.ndarray:
    """Extreme over the second axis (a power of two long) by halving: contiguous passes."""
    while rows.shape[1] > 1:
        half = rows.shape[1] // 2
        rows = pick(rows[:, :half], rows[:, half:])
    return rows[:, 0]


class Pyramid:
    """Lowest and highest of blocks of 16, of 256, ... samples (an eighth of y in memory)."""

    def __init__(self, y: np.ndarray):
        self._levels = [(y, y)]
        low = high = y
        while len(low) > _TOP_LEVEL:
            low = self._coarser(low, np.fmin)
            high = self._coarser(high, np.fmax)
            self._levels.append((low, high))

    @staticmethod
    def _coarser(values: np.ndarray, pick) -> np.ndarray:
        whole = len(values) // BLOCK
        return np.ascontiguousarray(_halve(values[: whole * BLOCK].reshape(whole, BLOCK), pick))

    def extremes(self, start, stop) -> tuple[np.ndarray, np.ndarray]:
        """(low, high) of y[start:stop] for arrays of non-empty ranges, shape (m,)."""
        return self._extremes(0, np.asarray(start), np.asarray(stop))

    def _extremes(self, level: int, start, stop):
        low_values, high_values = self._levels[level]
        if level == len(self._levels) - 1:
            return _over_ranges(low_values, high_values, start, stop)
        reach = np.arange(BLOCK)[:, None]
        index = np.concatenate(
            [np.minimum(start + reach, stop - 1), np.maximum(stop - 1 - reach, start)]
        )
        lows = low_values.take(index)
        low = np.fmin.reduce(lows, axis=0)
        high = np.fmax.reduce(lows if high_values is low_values else high_values.take(index), axis=0)
        inner_start, inner_stop = -(-start // BLOCK), stop // BLOCK
        has = np.nonzero(inner_stop > inner_start)[0]
        if len(has):
            inner_low, inner_high = self._extremes(level + 1, inner_start[has], inner_stop[has])
            low[has] = np.fmin(low[has], inner_low)
            high[has] = np.fmax(high[has], inner_high)
        return low, high


def _over_ranges(low_values, high_values, start, stop):
    pairs = np.stack([start, stop], axis=1).ravel()
    nan = [np.nan]
    low = np.fmin.reduceat(np.concatenate([low_values, nan]), pairs)[::2]
    high = np.fmax.reduceat(np.concatenate([high_values, nan]), pairs)[::2]
    return low, high


class Extremes:
    """Samples of one segment, ready to be reduced to the columns of any view.

    x: ascending, shape (n,); y: same shape, NaN where nothing may be drawn.
    Raises ValueError for unequal shapes or descending x.
    """

    def __init__(self, x, y):
        self.x = np.ascontiguousarray(x, dtype=np.float64)
        self.y = np.ascontiguousarray(y, dtype=np.float64)
        if self.x.shape != self.y.shape or self.x.ndim != 1:
            raise ValueError("x and y must be one-dimensional and of equal length")
        if np.any(self.x[1:] < self.x[:-1]):
            raise ValueError("x is not ascending")
        self.breaks = find_breaks(self.x)
        self._pyramid: Pyramid | None = None

    def build_pyramid(self) -> None:
        """Make the pyramid now (else it is made when first needed); safe in a worker."""
        if self._pyramid is None:
            self._pyramid = Pyramid(self.y)

    def visible(self, low: float, high: float) -> tuple[int, int]:
        """Sample range [start, stop) inside the view plus one sample on either side."""
        start, stop = np.searchsorted(self.x, [low, high], side="left")
        stop = int(np.searchsorted(self.x, high, side="right"))
        return max(int(start) - 1, 0), min(stop + 1, len(self.x))

    def columns(self, scale: PixelScale) -> Columns:
        """Reduce to the device-pixel columns of a view."""
        bounds = np.searchsorted(self.x, scale.edges())
        filled = np.nonzero(bounds[1:] > bounds[:-1])[0]
        start, stop = bounds[filled], bounds[filled + 1]
        low, high = self._reduce(start, stop)
        column = filled + scale.first_column()
        columns = [column, self.y[start], low, high, self.y[stop - 1]]
        start, stop, columns = self._with_neighbours(scale, bounds, (start, stop, columns))
        return Columns(*columns, joined=self._joined(start, stop, columns[1], columns[4]))

    def _reduce(self, start, stop):
        if len(start) == 0:
            return np.zeros(0), np.zeros(0)
        first, last = int(start[0]), int(stop[-1])
        if last - first > PYRAMID_ABOVE:
            self.build_pyramid()
            return self._pyramid.extremes(start, stop)
        inside = self.y[first:last]
        return np.fmin.reduceat(inside, start - first), np.fmax.reduceat(inside, start - first)

    def _with_neighbours(self, scale, bounds, found):
        start, stop, columns = found
        for sample, front in ((int(bounds[0]) - 1, True), (int(bounds[-1]), False)):
            if not 0 <= sample < len(self.x):
                continue
            column = int(np.floor(np.clip(scale.pixels(self.x[sample]), -1e9, 1e9)))
            # On the very border rounding may put it inside, where it does not belong.
            before, after = scale.first_column() - 1, scale.first_column() + len(bounds) - 1
            column = min(column, before) if front else max(column, after)
            extra = [np.array([column])] + [self.y[sample : sample + 1]] * 4
            pair = (lambda a, b: [a, b]) if front else (lambda a, b: [b, a])
            columns = [np.concatenate(pair(e, c)) for e, c in zip(extra, columns)]
            start = np.concatenate(pair([sample], start))
            stop = np.concatenate(pair([sample + 1], stop))
        return start, stop, columns

    def _joined(self, start, stop, first, last) -> np.ndarray:
        joined = np.zeros(len(start), dtype=bool)
        if len(start) > 1:
            broken = np.searchsorted(self.breaks, start[1:], side="right") != np.searchsorted(
                self.breaks, stop[:-1] - 1, side="right"
            )
            joined[1:] = ~broken & np.isfinite(first[1:]) & np.isfinite(last[:-1])
        return joined

    def runs(self, start: int, stop: int) -> list[tuple[int, int]]:
        """Unbroken stretches [a, b) of finite samples within [start, stop)."""
        inside = self.breaks[(self.breaks > start) & (self.breaks < stop)]
        bad = np.nonzero(~np.isfinite(self.y[start:stop]))[0] + start
        cuts = np.unique(np.concatenate([[start], inside, bad, bad + 1, [stop]]))
        runs = zip(cuts[:-1].tolist(), cuts[1:].tolist())
        return [(a, b) for a, b in runs if np.isfinite(self.y[a])]
