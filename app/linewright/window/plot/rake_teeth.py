"""Which teeth of the Rake a view shows, and where, at any velocity."""

from __future__ import annotations

import numpy as np

from ...spectra.medium import C_KM_S, from_medium, to_medium
from .extremes import PixelScale
from .rake_data import RakeData

# Rows stand one behind the other on one ascending axis, this far apart (Angstrom).
_ROW_STRIDE = 1e7
_SAME = 1e-6  # Angstrom


class _Comb:
    """Teeth of all rows in one sorted array.

    rest: vacuum Angstrom; place: the same, or where a tooth that does not move is observed
    """

    def __init__(self, data: RakeData, which: np.ndarray, place: np.ndarray):
        row, place = np.asarray(data.row)[which], np.asarray(place, dtype=float)[which]
        order = np.lexsort((place, row))
        self.row, self.place = row[order], place[order]
        self.rest = np.asarray(data.wave, dtype=float)[which][order]
        self.key = self.place + _ROW_STRIDE * self.row
        depth = np.asarray(data.depth, dtype=float)[which][order]
        self.depth = np.append(np.clip(np.nan_to_num(depth), 0.0, 1.0), 0.0)
        gone = None if data.missing is None else np.asarray(data.missing, dtype=bool)[which][order]
        self.gone = np.zeros(0, dtype=int) if gone is None else np.nonzero(gone)[0]

    def columns(self, rows: int, edges: np.ndarray) -> np.ndarray:
        bounds = np.searchsorted(self.key, edges + _ROW_STRIDE * np.arange(rows)[:, None])
        filled = np.ones(bounds.shape, dtype=bool)  # the end of each row closes its last column
        filled[:, :-1] = bounds[:, 1:] > bounds[:, :-1]
        deepest = np.full(bounds.shape, np.nan)
        deepest[filled] = np.maximum.reduceat(self.depth, bounds[filled])
        return deepest[:, :-1]

    def within(self, row: int, low: float, high: float) -> slice:
        return slice(*np.searchsorted(self.key, [row * _ROW_STRIDE + low, row * _ROW_STRIDE + high]))


class RakeTeeth:
    """Teeth that move with the rake and teeth that stand; ``columns`` reduces them to device
    pixels.

    The view is divided by (1 + v/c) and looked up among the rest wavelengths, so a change
    of velocity moves no array. Column edges go to vacuum once per view.
    """

    def __init__(self, data: RakeData):
        self.names, self.bands, self._origins = data.row_names, data.bands, dict(data.origins)
        wave = np.asarray(data.wave, dtype=float)
        own = np.full(len(wave), np.nan) if data.own is None else np.asarray(data.own, dtype=float)
        stands = np.isfinite(own)
        self._moving = _Comb(data, ~stands, wave)
        self._standing = _Comb(data, stands, wave * (1.0 + np.nan_to_num(own) / C_KM_S))
        self._edges: tuple = (None, None, np.zeros(0))

    def who(self, row: int) -> tuple[str, str]:
        """(species, origin) of a row: what the theme needs for its colour and marker."""
        name = self.names[row]
        return name, self._origins.get(name, "stellar")

    def _combs(self, velocity: float):
        """(comb, factor from its places to observed wavelengths)"""
        pairs = ((self._moving, 1.0 + velocity / C_KM_S), (self._standing, 1.0))
        return [(comb, factor) for comb, factor in pairs if len(comb.place)]

    def columns(self, rows: int, scale: PixelScale, medium: str, velocity: float) -> np.ndarray:
        """Depth of the strongest tooth per row and device-pixel column, NaN without one.

        Shape (rows, columns touched by the view), first column ``scale.first_column()``.
        """
        edges = self._vacuum_edges(scale, medium)
        found = [comb.columns(rows, edges / factor) for comb, factor in self._combs(velocity)]
        if not found:
            return np.full((rows, len(edges) - 1), np.nan)
        return found[0] if len(found) == 1 else np.fmax(*found)

    def missing(self, scale: PixelScale, medium: str, velocity: float):
        """(row, pixel x, depth) of teeth marked as missing from the spectrum."""
        rows, places, depths = [np.zeros(0, dtype=int)], [np.zeros(0)], [np.zeros(0)]
        for comb, factor in self._combs(velocity):
            shifted = to_medium(comb.place[comb.gone] * factor, medium)
            inside = (shifted >= scale.low) & (shifted <= scale.high)
            which = comb.gone[inside]
            rows.append(comb.row[which])
            places.append(np.floor(scale.pixels(shifted[inside])) + 0.5)
            depths.append(comb.depth[which])
        return np.concatenate(rows), np.concatenate(places), np.concatenate(depths)

    def nearest(
        self, row: int, observed: float, within: float, velocity: float
    ) -> tuple[float, float] | None:
        """(rest wavelength, depth) of a row's tooth closest to an observed vacuum wavelength."""
        best, found = within, None
        for comb, factor in self._combs(velocity):
            part = comb.within(row, (observed - within) / factor, (observed + within) / factor)
            far = np.abs(comb.place[part] * factor - observed)
            if len(far) and far.min() <= best:
                at = part.start + int(np.argmin(far))
                best, found = float(far.min()), (float(comb.rest[at]), float(comb.depth[at]))
        return found

    def observed(self, row: int | None, rest: float, velocity: float) -> float:
        """Where a line stands, vacuum Angstrom: with the rake unless its tooth has its own place."""
        comb = self._standing
        here = np.abs(comb.rest - rest) < _SAME
        here &= comb.row == (-1 if row is None else row)
        return float(comb.place[here][0]) if here.any() else rest * (1.0 + velocity / C_KM_S)

    def _vacuum_edges(self, scale: PixelScale, medium: str) -> np.ndarray:
        if self._edges[:2] != (scale, medium):
            self._edges = (scale, medium, from_medium(scale.edges(), medium))
        return self._edges[2]
