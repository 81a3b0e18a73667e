"""Siblings: other lines of a candidate's species, each a small strip in velocity space."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import Signal
from PySide6.QtWidgets import QWidget

from ..theme import Theme


@dataclass(frozen=True, eq=False)
class Strip:
    """One sibling line.

    title: what stands above it (its wavelength); note: a word below ('seen', 'in a gap')
    velocity: km/s about the expected place, ascending; flux: divided by the continuum
    """

    title: str
    velocity: np.ndarray
    flux: np.ndarray
    note: str = ""


class SiblingStrips(QWidget):
    """Strips in two columns sharing one velocity axis; zero is the expected place."""

    stripActivated = Signal(int)  # index, by click or Return

    def set_strips(self, strips: list[Strip], colour: str) -> None:
        """Replace the strips; ``colour`` draws the line at the expected place."""
        raise NotImplementedError

    def set_theme(self, theme: Theme) -> None:
        """Change colours at once."""
        raise NotImplementedError
