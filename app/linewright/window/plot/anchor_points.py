"""Continuum anchors as diamonds on the continuum that can be dragged."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QColor, QPainter, QPen

from .fit_limits import say_in
from .handled_lane import Grip
from .marks import marker_polygon

REACH = 9.0  # logical pixels about an anchor in which it can be taken
ON_LINE = 8.0  # logical pixels from the continuum at which a click means it
ROOM = 1.06  # of the highest anchor, so that it can be raised
APART = 20.0  # anchors nearer to one another in the view are dots that cannot be taken
HINT = "Continuum anchors: drag one, click the continuum to add, Alt+Del removes the chosen"
CROWDED = "Continuum anchors: zoom in to move them"


class AnchorPoints(Grip):
    """shown: the view mode; wave: own-medium Angstrom, value: flux, each (n,), ascending;
    chosen: index or None. ``act`` gets (what, index, wave, flux): 'drag', 'drop', 'choose'
    or 'add'."""

    cursor = Qt.CursorShape.SizeAllCursor

    def __init__(self, act):
        self.shown, self.chosen = False, None
        self.wave = self.value = np.zeros(0)
        self._act = act

    def _inside(self, low: float, high: float, width: float):
        """Indices in view, and whether they stand apart enough to be taken."""
        inside = np.flatnonzero((self.wave >= low) & (self.wave <= high))
        return inside, len(inside) * APART <= width

    def at(self, point: QPointF, lane):
        if not self.shown:
            return None
        scale = lane.scale()
        inside, apart = self._inside(scale.low, scale.high, scale.width)
        if not apart or not len(inside):
            return None
        away = np.hypot(scale.pixels(self.wave[inside]) - point.x(),
                        lane.y_of(self.value[inside]) - point.y())
        best = int(np.argmin(away))
        return int(inside[best]) if away[best] <= REACH else None

    def drag(self, held: int, point: QPointF, lane, final: bool) -> None:
        self.chosen = held
        flux = float(np.clip(lane.flux_at(point.y()), *lane.flux_shown))  # it stays in view
        self._act("drop" if final else "drag", held, float(lane.wave_at(point.x())), flux)

    def clicked(self, held, point: QPointF, lane) -> bool:
        if held is not None:
            self._act("choose", held, 0.0, 0.0)
            return True
        wave = float(lane.wave_at(point.x()))
        for nodes, flux in lane.continuum if self.shown else ():
            if len(nodes) and nodes[0] <= wave <= nodes[-1]:
                value = float(np.interp(wave, nodes, flux))
                if abs(float(lane.y_of(value)) - point.y()) <= ON_LINE:
                    self._act("add", -1, wave, value)
                    return True
        return False

    def paint(self, painter: QPainter, frame, theme) -> None:
        if not self.shown:
            return
        inside, apart = self._inside(frame.scale.low, frame.scale.high,
                                     frame.scale.width / frame.ratio)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
        pen = QPen(QColor(theme.ink), 1.2 * frame.ratio)
        x, y = frame.scale.pixels(self.wave[inside]), frame.y(self.value[inside])
        for k, px, py in zip(inside.tolist(), x.tolist(), y.tolist()):
            mine = k == self.chosen
            painter.setPen(pen if apart else Qt.PenStyle.NoPen)
            painter.setBrush(QColor(theme.accent if mine else theme.continuum))
            size = (7.5 if mine else 5.5) if apart else 1.5
            painter.drawPolygon(marker_polygon("diamond", px, py, size * frame.ratio))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)
        say_in(painter, frame, 0.0, HINT if apart else CROWDED, theme)

    def headroom(self, low: float, high: float) -> float | None:
        """Flux that must be in view for the anchors between low and high to be moved."""
        inside = self.value[(self.wave >= low) & (self.wave <= high)] if self.shown else ()
        return float(np.max(inside)) * ROOM if len(inside) else None
