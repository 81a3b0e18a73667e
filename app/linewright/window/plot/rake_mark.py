"""The frame about the tooth of the line looked at."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QPolygonF

from ...spectra.medium import to_medium

HALF = 5  # logical pixels on either side of the tooth


def draw_marked(painter: QPainter, lane, scale, place) -> None:
    """A box about the tooth in its species' row, and a small wedge at the lane's foot, which
    shows where the line stands even when its species has no row.

    place: (device y, device pixels per logical pixel)
    """
    (rest, species), (offset, ratio) = lane.marked, place
    state = lane.state
    row = lane.row_of(species)
    wave = float(to_medium(lane.teeth.observed(row, rest, state.velocity), state.medium))
    if not scale.low <= wave <= scale.high:
        return
    x = float(np.floor(scale.pixels(wave))) + 0.5
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
    accent = QColor(state.theme.accent)
    foot, half = offset + lane.height() * ratio, HALF * ratio
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(accent)
    painter.drawPolygon(QPolygonF([QPointF(x, foot - 5 * ratio), QPointF(x - half, foot),
                                   QPointF(x + half, foot)]))
    if row is not None:
        painter.setPen(QPen(accent, 1.5 * ratio))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        top = offset + (lane.head + row * lane.row_height) * ratio
        painter.drawRoundedRect(
            QRectF(x - half, top, 2 * half, (lane.row_height - 1) * ratio), 2 * ratio, 2 * ratio)
    painter.restore()
