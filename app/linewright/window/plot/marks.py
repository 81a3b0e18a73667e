"""Marker shapes of the species families, filled by standing."""

from __future__ import annotations

import math
from functools import lru_cache

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QPixmap, QPolygonF

from .safe_paint import painting

MARKERS = ("diamond", "triangle", "square", "circle", "cross", "bar", "star", "vee", "hexagon")
# Share of the marker filled, from the bottom: the standing without its colour.
FILL = {"firm": 1.0, "likely": 0.5, "tentative": 0.0}


def _ring(count: int, start: float, radii: tuple[float, ...]) -> list[tuple[float, float]]:
    return [
        (
            radii[i % len(radii)] * math.cos(start + 2 * math.pi * i / count),
            radii[i % len(radii)] * math.sin(start + 2 * math.pi * i / count),
        )
        for i in range(count)
    ]


_UP = -math.pi / 2
_SHAPES = {
    "diamond": _ring(4, _UP, (1.0,)),
    "triangle": _ring(3, _UP, (1.0,)),
    "square": [(-0.8, -0.8), (0.8, -0.8), (0.8, 0.8), (-0.8, 0.8)],
    "circle": _ring(20, _UP, (0.9,)),
    "cross": [
        (-0.35, -1), (0.35, -1), (0.35, -0.35), (1, -0.35), (1, 0.35), (0.35, 0.35),
        (0.35, 1), (-0.35, 1), (-0.35, 0.35), (-1, 0.35), (-1, -0.35), (-0.35, -0.35),
    ],
    "bar": [(-1, -0.45), (1, -0.45), (1, 0.45), (-1, 0.45)],
    "star": _ring(10, _UP, (1.0, 0.45)),
    "hexagon": _ring(6, 0.0, (1.0,)),
    "vee": _ring(3, math.pi / 2, (1.0,)),
}


def marker_polygon(name: str, x: float, y: float, radius: float) -> QPolygonF:
    """Outline of a marker about (x, y); KeyError for a name not in MARKERS."""
    return QPolygonF([QPointF(x + radius * dx, y + radius * dy) for dx, dy in _SHAPES[name]])


def draw_marker(painter: QPainter, shape: QPolygonF, colour: str, fill: float = 1.0) -> None:
    """Outline in ``colour``, its lower share ``fill`` filled."""
    painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
    painter.setPen(QPen(QColor(colour), 1.2))
    if fill > 0:
        box = shape.boundingRect()
        box.setTop(box.bottom() - fill * box.height())
        painter.setBrush(QColor(colour))
        filled = shape if fill >= 1 else shape.intersected(QPolygonF(box))
        painter.drawPolygon(filled)
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.drawPolygon(shape)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)


@lru_cache(maxsize=512)
def marker_pixmap(name: str, colour: str, fill: float, size: int, ratio: float) -> QPixmap:
    """A marker ``size`` logical pixels wide, ready to blit."""
    pixmap = QPixmap(round(size * ratio), round(size * ratio))
    pixmap.setDevicePixelRatio(ratio)
    pixmap.fill(Qt.GlobalColor.transparent)
    shape = marker_polygon(name, size / 2, size / 2, size / 2 - 1)
    with painting(pixmap) as painter:
        draw_marker(painter, shape, colour, fill)
    return pixmap
