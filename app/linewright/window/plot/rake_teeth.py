"""Which teeth of the Rake a view shows, and where, at any velocity."""

from __future__ import annotations

import numpy as np

from ...spectra.medium import C_KM_S, from_medium, to_medium
from .extremes import PixelScale
from .rake_data import RakeData

# Rows stand one behind the other on one ascending axis, this far apart (Angstrom).
_ROW_STRIDE = 1e7


class RakeTeeth:
    """Teeth of all rows in one sorted array; ``columns`` reduces them to device pixels.

    The view is divided by (1 + v/c) and looked up among the rest wavelengths, so a change
    of velocity moves no array. Column edges go to vacuum once per view.
    """

    def __init__(self, data: RakeData):
        self.names = data.row_names
        order = np.argsort(data.row, kind="stable")
        row = np.asarray(data.row)[order]
        self.wave = np.asarray(data.wave, dtype=float)[order]
        self._key = self.wave + _ROW_STRIDE * row
        depth = np.clip(np.nan_to_num(np.asarray(data.depth, dtype=float)[order]), 0.0, 1.0)
        self._depth = np.append(depth, 0.0)
        gone = None if data.missing is None else np.asarray(data.missing, dtype=bool)[order]
        self._gone = np.zeros(0, dtype=int) if gone is None else np.nonzero(gone)[0]
        self._row = row
        self._edges: tuple = (None, None, np.zeros(0))

    def columns(self, rows: int, scale: PixelScale, medium: str, velocity: float) -> np.ndarray:
        """Depth of the strongest tooth per row and device-pixel column, NaN without one.

        Shape (rows, columns touched by the view), first column ``scale.first_column()``.
        """
        edges = self._vacuum_edges(scale, medium) / (1.0 + velocity / C_KM_S)
        keys = edges + _ROW_STRIDE * np.arange(rows)[:, None]
        bounds = np.searchsorted(self._key, keys)
        filled = np.ones(bounds.shape, dtype=bool)  # the end of each row closes its last column
        filled[:, :-1] = bounds[:, 1:] > bounds[:, :-1]
        deepest = np.full(bounds.shape, np.nan)
        deepest[filled] = np.maximum.reduceat(self._depth, bounds[filled])
        return deepest[:, :-1]

    def missing(self, scale: PixelScale, medium: str, velocity: float):
        """(row, pixel x, depth) of teeth marked as missing from the spectrum."""
        shifted = to_medium(self.wave[self._gone] * (1.0 + velocity / C_KM_S), medium)
        inside = (shifted >= scale.low) & (shifted <= scale.high)
        which = self._gone[inside]
        at = np.floor(scale.pixels(shifted[inside])) + 0.5
        return self._row[which], at, self._depth[which]

    def nearest(self, row: int, rest: float, within: float) -> tuple[float, float] | None:
        """(rest wavelength, depth) of a row's tooth closest to ``rest``, vacuum Angstrom."""
        first, last = np.searchsorted(
            self._key, [row * _ROW_STRIDE + rest - within, row * _ROW_STRIDE + rest + within]
        )
        if last <= first:
            return None
        best = first + int(np.argmin(np.abs(self.wave[first:last] - rest)))
        return float(self.wave[best]), float(self._depth[best])

    def _vacuum_edges(self, scale: PixelScale, medium: str) -> np.ndarray:
        if self._edges[:2] != (scale, medium):
            self._edges = (scale, medium, from_medium(scale.edges(), medium))
        return self._edges[2]
