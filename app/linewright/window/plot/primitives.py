"""Arrays to QPainter in one call, without one Python object per point."""

from __future__ import annotations

import numpy as np
import shiboken6
from PySide6.QtCore import QLineF
from PySide6.QtGui import QPainter, QPolygonF

# Beyond this many pixels the raster engine's fixed-point coordinates overflow.
FAR = 30_000.0


def draw_lines(painter: QPainter, lines: np.ndarray) -> None:
    """Draw rows (x1, y1, x2, y2), shape (n, 4), float64, with the painter's pen."""
    lines = np.ascontiguousarray(lines, dtype=np.float64)
    if len(lines):
        painter.drawLines(shiboken6.Shiboken.wrapInstance(lines.ctypes.data, QLineF), len(lines))


def polygon(x, y) -> QPolygonF:
    """Points as a QPolygonF; x and y of equal length n."""
    shape = QPolygonF()
    if len(x) == 0:
        return shape
    shape.resize(len(x))
    memory = shiboken6.Shiboken.VoidPtr(shape.data(), len(x) * 16, True)
    points = np.frombuffer(memory, dtype=np.float64).reshape(-1, 2)
    points[:, 0], points[:, 1] = x, y
    return shape


def draw_polyline(painter: QPainter, x, y) -> None:
    """Draw one connected line through x, y (pixels)."""
    painter.drawPolyline(polygon(x, y))
