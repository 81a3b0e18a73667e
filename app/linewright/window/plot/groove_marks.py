"""Ticks, rivals and handle of the velocity track's groove."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QPolygonF

from ..theme import Theme
from .geometry import nice_ticks
from .primitives import draw_lines

TOP = 3


def draw_ticks(painter: QPainter, width: int, place, theme: Theme) -> None:
    """Ticks and numbers under the groove; place: (scale in km/s, y of the groove's floor)."""
    scale, floor = place
    most = max(2, int(scale.width // 80))
    major, minor, decimals = nice_ticks(scale.low, scale.high, most)
    for ticks, length in ((minor, 2.0), (major, 4.0)):
        x = np.floor(scale.pixels(ticks)) + 0.5
        top = np.full(len(x), floor)
        draw_lines(painter, np.stack([x, top, x, top + length], axis=1))
    painter.setPen(QColor(theme.muted))
    font = painter.font()
    font.setPointSizeF(max(7.0, font.pointSizeF() - 1))
    painter.setFont(font)
    line = painter.fontMetrics().height()
    for value, x in zip(major.tolist(), scale.pixels(major).tolist()):
        text = f"{value + 0.0:.{decimals}f}".replace("-", "−")
        half = 0.5 * painter.fontMetrics().horizontalAdvance(text) + 2
        x = min(max(x, half), width - half)
        box = QRectF(x - half, floor + 5, 2 * half, line)
        painter.drawText(box, int(Qt.AlignmentFlag.AlignHCenter), text)


def draw_rivals(painter: QPainter, places, floor: float, theme: Theme) -> None:
    """Hollow triangles on the floor at each x."""
    painter.setPen(QPen(QColor(theme.muted), 1))
    painter.setBrush(QColor(theme.base))
    for x in np.asarray(places, dtype=float).tolist():
        tip = [QPointF(x, floor - 6), QPointF(x - 4, floor), QPointF(x + 4, floor)]
        painter.drawPolygon(QPolygonF(tip))


def draw_handle(painter: QPainter, foot, theme: Theme, declared: bool) -> None:
    """A pin at foot (x, y); hollow with a broken stem while the velocity is only a guess."""
    x, floor = foot
    colour = QColor(theme.profile)
    style = Qt.PenStyle.SolidLine if declared else Qt.PenStyle.DotLine
    painter.setPen(QPen(colour, 1.6, style))
    painter.drawLine(QPointF(x, TOP + 8), QPointF(x, floor))
    painter.setPen(QPen(colour, 1.6))
    painter.setBrush(colour if declared else QColor(theme.base))
    corners = ((-5, 0), (5, 0), (5, 5), (0, 10), (-5, 5))
    painter.drawPolygon(QPolygonF([QPointF(x + dx, TOP + dy) for dx, dy in corners]))
