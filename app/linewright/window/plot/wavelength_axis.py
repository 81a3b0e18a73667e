"""The wavelength axis under the lanes."""

from __future__ import annotations

import numpy as np
from PySide6.QtGui import QColor, QPainter, QPen

from .geometry import LEFT, RIGHT, nice_ticks
from .navigation import NavigableLane
from .primitives import draw_lines
from .text_pictures import TextPictures

_TICK_WIDTH = 110
TITLES = {
    "air": "wavelength in air (Å)",
    "vacuum": "wavelength in vacuum (Å)",
    "unknown": "wavelength, medium unknown (Å)",
}


class WavelengthAxis(NavigableLane):
    """Ticks, numbers and the medium in words."""

    def __init__(self, state, parent=None):
        super().__init__(state, parent)
        self.setFixedHeight(self.fontMetrics().height() * 2 + 12)

    def title(self) -> str:
        return TITLES[self.state.medium]

    def draw(self, painter: QPainter) -> None:
        scale, theme = self.scale(), self.state.theme
        most = max(2, int(scale.width // _TICK_WIDTH))
        major, minor, decimals = nice_ticks(scale.low, scale.high, most)
        painter.setPen(QPen(QColor(theme.faint), 0))
        painter.drawLine(LEFT, 0, self.width() - RIGHT, 0)
        for ticks, length in ((minor, 4.0), (major, 7.0)):
            x = np.floor(scale.pixels(ticks)) + 0.5
            top = np.zeros(len(x))
            draw_lines(painter, np.stack([x, top, x, top + length], axis=1))
        self._draw_numbers(painter, major, scale.pixels(major), decimals)
        middle = 0.5 * (LEFT + self.width() - RIGHT)
        texts = TextPictures(painter, theme.ink)
        texts.draw(self.title(), middle, 9 + self.fontMetrics().height(), 0.5)

    def _draw_numbers(self, painter: QPainter, values, x, decimals: int) -> None:
        texts = TextPictures(painter, self.state.theme.ink)
        half = 0.5 * self.fontMetrics().horizontalAdvance(f"{self.state.high:.{decimals}f}") + 2
        for value, at in zip(values.tolist(), x.tolist()):
            at = min(max(at, half), self.width() - half)
            texts.draw(f"{value + 0.0:.{decimals}f}".replace("-", "−"), at, 8, 0.5)
