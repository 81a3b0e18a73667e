"""Ticks at features as strokes made once, so that a pan only shifts them."""

from __future__ import annotations

import numpy as np

from ..theme import Theme
from .extremes import PixelScale
from .feature_marks import FIRM, LIKELY, SET_ASIDE, TENTATIVE, UNCLAIMED, FeatureMarks

TICK = 10
# (dx1, y1, dx2, y2) from the feature's pixel and the foot: the standing shows in form.
STROKES = {
    FIRM: ((0, -TICK, 0, 0), (1, -TICK, 1, 0)),
    LIKELY: ((0, -TICK, 0, 0),),
    TENTATIVE: ((0, -TICK, 0, 3 - TICK), (0, -3, 0, 0)),
    UNCLAIMED: ((0, -5, 0, 0),),
    SET_ASIDE: ((-3, -6, 3, 0), (-3, 0, 3, -6)),
}


class TickStrokes:
    """Strokes of all features by colour, each colour's in order of wavelength."""

    def __init__(self, marks: FeatureMarks, theme: Theme):
        self.theme = theme
        self._codes: dict[str, int] = {}  # of colours
        self._known: dict[tuple, int] = {}
        self._code = np.array([self._code_of(marks, k) for k in range(len(marks))], dtype=int)
        self._groups: dict[int, tuple[np.ndarray, np.ndarray]] = {}
        self._make(marks, set(self._codes.values()))

    def _code_of(self, marks: FeatureMarks, row: int) -> int:
        plain = int(marks.standing[row]) in (UNCLAIMED, SET_ASIDE)
        who = () if plain else (marks.species[row], marks.origin[row])
        if who not in self._known:
            colour = self.theme.colour(*who) if who else self.theme.faint
            self._known[who] = self._codes.setdefault(colour, len(self._codes))
        return self._known[who]

    def _make(self, marks: FeatureMarks, codes) -> None:
        for code in codes:
            self._groups[code] = _strokes(marks, np.nonzero(self._code == code)[0])

    def follow(self, marks: FeatureMarks, rows: np.ndarray) -> None:
        """Rows of the same features whose claims changed: only their colours are redone."""
        touched = set(self._code[rows].tolist())
        for row in rows.tolist():
            self._code[row] = self._code_of(marks, row)
        self._make(marks, touched | set(self._code[rows].tolist()))

    def lines(self, scale: PixelScale, foot: float):
        """(colour, line rows) of what is in view, ticks ending at ``foot``."""
        for colour, code in self._codes.items():
            wave, shape = self._groups[code]
            first, last = np.searchsorted(wave, [scale.low, scale.high])
            if last > first:
                lines = shape[first:last].copy()
                lines[:, 0::2] += (np.floor(scale.pixels(wave[first:last])) + 0.5)[:, None]
                lines[:, 1::2] += foot
                yield colour, lines


def _strokes(marks: FeatureMarks, rows: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """(wave, shape) of every stroke of these rows, in order of wavelength."""
    owners, shapes = [np.zeros(0, dtype=int)], [np.zeros((0, 4))]
    for standing, strokes in STROKES.items():
        mine = rows[marks.standing[rows] == standing]
        owners.append(np.repeat(mine, len(strokes)))
        shapes.append(np.tile(np.array(strokes, dtype=float), (len(mine), 1)))
    owner, shape = np.concatenate(owners), np.concatenate(shapes)
    order = np.argsort(owner, kind="stable")
    return marks.wave[owner[order]], shape[order]
