"""What the Rake shows: predicted lines of the chosen species as arrays."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True, eq=False)
class RakeData:
    """Predicted lines of the species shown, one row per species.

    wave: rest wavelengths in vacuum, Angstrom, ascending, shape (n,)
    depth: predicted strength 0-1 (tooth length), shape (n,)
    row: index into ``row_names`` of each line, shape (n,)
    row_names: species of each row, top row first; the theme colours a row by its family
    missing: True for a line that ought to be seen and is not, shape (n,), or None
    own: km/s of a line that does not move with the rake (of the air, a cloud, another star),
        NaN for the others, shape (n,), or None
    bands: (row, low, high) of molecular bands, rest vacuum Angstrom
    origins: (species, origin) of rows that are not the star's: they have that origin's colour

    Raises ValueError for arrays of unequal length, unsorted wavelengths or a row index
    outside ``row_names``.
    """

    wave: np.ndarray
    depth: np.ndarray
    row: np.ndarray
    row_names: tuple[str, ...]
    missing: np.ndarray | None = None
    own: np.ndarray | None = None
    bands: tuple[tuple[int, float, float], ...] = ()
    origins: tuple[tuple[str, str], ...] = ()

    def __post_init__(self):
        count = len(self.wave)
        others = (self.depth, self.row, self.missing, self.own)
        if any(column is not None and len(column) != count for column in others):
            raise ValueError("rake columns differ in length")
        if count and np.any(np.diff(self.wave) < 0):
            raise ValueError("rake wavelengths are not ascending")
        if count and not 0 <= int(np.min(self.row)) <= int(np.max(self.row)) < len(self.row_names):
            raise ValueError("rake row index outside row_names")

    @staticmethod
    def empty() -> RakeData:
        nothing = np.zeros(0)
        return RakeData(nothing, nothing, nothing.astype(int), ())
