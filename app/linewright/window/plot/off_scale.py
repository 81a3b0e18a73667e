"""Where flux leaves the scale at the top: small wedges, so that no peak is cut off unseen."""

from __future__ import annotations

import numpy as np
from PySide6.QtGui import QColor, QPainter

from .geometry import Frame
from .primitives import polygon

APART, HALF, TALL = 10.0, 4.0, 5.0  # logical pixels: between wedges, and their size
MOST = 60  # more say nothing that the curve does not


def places_above(reduced, limit: float, apart: float) -> np.ndarray:
    """Device-pixel x of the peaks above a flux, one for those closer than ``apart``."""
    found = []
    for part in reduced:
        pairs = [(part.columns.column + 0.5, part.columns.high)] if part.columns is not None else (
            part.runs)
        for x, high in pairs:
            over = np.flatnonzero(np.asarray(high) > limit)  # NaN is not above
            groups = np.split(over, np.flatnonzero(np.diff(x[over]) > apart) + 1)
            found += [float(x[g[np.argmax(np.asarray(high)[g])]]) for g in groups if len(g)]
    return np.array(sorted(found))


def draw_off_scale(painter: QPainter, frame: Frame, reduced, colour: str) -> None:
    """Wedges under the top of the flux area; the painter is in device pixels."""
    x = places_above(reduced, frame.flux_high, APART * frame.ratio)
    x = x[(x >= frame.scale.origin) & (x <= frame.scale.origin + frame.scale.width)]
    if not 0 < len(x) <= MOST:
        return
    half, foot = HALF * frame.ratio, frame.top + TALL * frame.ratio
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
    painter.setPen(QColor(colour))
    painter.setBrush(QColor(colour))
    for at in x.tolist():
        painter.drawPolygon(polygon([at - half, at, at + half], [foot, frame.top, foot]))
    painter.restore()
