"""Short texts that repeat from frame to frame (axis numbers), rendered once and copied."""

from __future__ import annotations

from functools import lru_cache

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPainter, QPixmap

from .safe_paint import painting


@lru_cache(maxsize=1024)
def _picture(text: str, colour: str, font_key: str, ratio: float) -> QPixmap:
    font = QFont()
    font.fromString(font_key)
    metrics = QFontMetricsF(font)
    width, height = metrics.horizontalAdvance(text) + 2, metrics.height()
    picture = QPixmap(max(1, round(width * ratio)), max(1, round(height * ratio)))
    picture.setDevicePixelRatio(ratio)
    picture.fill(Qt.GlobalColor.transparent)
    with painting(picture) as painter:
        painter.setFont(font)
        painter.setPen(QColor(colour))
        painter.drawText(QPointF(1, metrics.ascent()), text)
    return picture


class TextPictures:
    """Draws texts of one font; a change of font or screen simply renders anew."""

    def __init__(self, painter: QPainter, colour: str):
        self._painter, self._colour = painter, colour
        self._font = painter.font().toString()
        self._ratio = painter.device().devicePixelRatioF()

    def draw(self, text: str, x: float, y: float, side: float) -> None:
        """Top at y; ``side`` 0 puts the left edge at x, 0.5 the middle, 1 the right edge."""
        picture = _picture(text, self._colour, self._font, self._ratio)
        left = x - side * picture.width() / self._ratio
        self._painter.drawPixmap(QPointF(round(left), round(y)), picture)
