"""Which teeth of the Rake a view shows, and where, at any velocity."""

from __future__ import annotations

import numpy as np

from ...spectra.medium import C_KM_S, from_medium, to_medium
from .extremes import PixelScale
from .rake_data import RakeData

# Up to this many teeth of a row are placed one by one, above by pixel column.
DIRECT = 1200


class RakeRow:
    """Teeth of one species, sorted by vacuum wavelength."""

    def __init__(self, wave: np.ndarray, depth: np.ndarray, missing: np.ndarray | None):
        self.wave = np.ascontiguousarray(wave, dtype=float)
        self.depth = np.clip(np.nan_to_num(depth), 0.0, 1.0)
        self.missing = missing

    def visible(self, low: float, high: float) -> slice:
        """Teeth at rest between low and high, vacuum Angstrom."""
        first, last = np.searchsorted(self.wave, [low, high])
        return slice(int(first), int(last))


class RakeTeeth:
    """Rows of a RakeData; ``teeth`` gives positions for one view and velocity.

    The view is divided by (1 + v/c) and looked up in the sorted rest wavelengths, so a
    change of velocity moves no array. Column edges go to vacuum once per view.
    """

    def __init__(self, data: RakeData):
        self.names = data.row_names
        self.rows = [self._row(data, index) for index in range(len(data.row_names))]
        self._edges: tuple = (None, None, np.zeros(0))

    @staticmethod
    def _row(data: RakeData, index: int) -> RakeRow:
        mine = np.asarray(data.row) == index
        missing = None if data.missing is None else np.asarray(data.missing)[mine]
        return RakeRow(np.asarray(data.wave)[mine], np.asarray(data.depth)[mine], missing)

    def teeth(self, row: int, scale: PixelScale, medium: str, velocity: float):
        """(pixel x, depth) of the strongest tooth per device-pixel column of one row."""
        factor = 1.0 + velocity / C_KM_S
        edges = self._vacuum_edges(scale, medium)
        teeth = self.rows[row]
        inside = teeth.visible(edges[0] / factor, edges[-1] / factor)
        if inside.stop - inside.start <= DIRECT:
            at = scale.pixels(to_medium(teeth.wave[inside] * factor, medium))
            return np.floor(at) + 0.5, teeth.depth[inside]
        bounds = np.searchsorted(teeth.wave, edges / factor)
        filled = np.nonzero(bounds[1:] > bounds[:-1])[0]
        deepest = np.maximum.reduceat(
            teeth.depth[: bounds[-1]], bounds[filled]
        )
        return filled + scale.first_column() + 0.5, deepest

    def missing(self, row: int, scale: PixelScale, medium: str, velocity: float):
        """(pixel x, depth) of teeth marked as missing from the spectrum."""
        teeth = self.rows[row]
        if teeth.missing is None:
            return np.zeros(0), np.zeros(0)
        factor = 1.0 + velocity / C_KM_S
        edges = self._vacuum_edges(scale, medium)
        inside = teeth.visible(edges[0] / factor, edges[-1] / factor)
        gone = teeth.missing[inside]
        at = scale.pixels(to_medium(teeth.wave[inside][gone] * factor, medium))
        return np.floor(at) + 0.5, teeth.depth[inside][gone]

    def _vacuum_edges(self, scale: PixelScale, medium: str) -> np.ndarray:
        if self._edges[:2] != (scale, medium):
            self._edges = (scale, medium, from_medium(scale.edges(), medium))
        return self._edges[2]
