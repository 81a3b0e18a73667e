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
        rows: dict[str, list[int]] = {}
        for row, standing in enumerate(marks.standing.tolist()):
            plain = standing in (UNCLAIMED, SET_ASIDE)
            colour = theme.faint if plain else theme.colour(marks.species[row], marks.origin[row])
            rows.setdefault(colour, []).append(row)
        self._groups = [
            (colour, *_strokes(marks, np.array(members))) for colour, members in rows.items()
        ]

    def lines(self, scale: PixelScale, foot: float):
        """(colour, line rows) of what is in view, ticks ending at ``foot``."""
        for colour, wave, shape in self._groups:
            first, last = np.searchsorted(wave, [scale.low, scale.high])
            if last > first:
                lines = shape[first:last].copy()
                lines[:, 0::2] += (np.floor(scale.pixels(wave[first:last])) + 0.5)[:, None]
                lines[:, 1::2] += foot
                yield colour, lines


def _strokes(marks: FeatureMarks, rows: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """(wave, shape) of every stroke of these rows, in order of wavelength."""
    owner, shape = [], []
    for row in rows.tolist():
        for stroke in STROKES[int(marks.standing[row])]:
            owner.append(row)
            shape.append(stroke)
    return marks.wave[owner], np.array(shape, dtype=float)
