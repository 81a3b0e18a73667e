"""The limits of the selected feature's fit as two brackets that can be dragged."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen

from .handled_lane import Grip
from .primitives import draw_lines

REACH = 5.0  # logical pixels on either side of a bracket in which it can be taken
LEAST = 16.0  # brackets nearer to one another are not shown: the view is too wide
_FOOT, _GRIP = 6.0, (7.0, 22.0)


class FitLimits(Grip):
    """limits: own-medium Angstrom, None for nothing; inner: what they must enclose; words:
    what the fit under them says; ``dragged`` gets (low, high, final)."""

    def __init__(self, dragged, touched):
        self.limits: tuple[float, float] | None = None
        self.inner = (0.0, 0.0)
        self.words = ""
        self._dragged, self._touched = dragged, touched

    def pixels(self, lane) -> tuple[float, float] | None:
        """Logical x of both brackets; None where they are not shown."""
        if self.limits is None:
            return None
        low, high = (float(x) for x in lane.scale().pixels(np.array(self.limits)))
        return (low, high) if high - low >= LEAST else None

    def at(self, point: QPointF, lane):
        at = self.pixels(lane)
        if at is None or not lane.labels.height <= point.y() <= lane.height():
            return None
        away = [abs(point.x() - x) for x in at]
        nearest = int(np.argmin(away))
        return nearest if away[nearest] <= REACH else None

    def touch(self, held) -> None:
        self._touched()

    def drag(self, held: int, point: QPointF, lane, final: bool) -> None:
        wave, limits = float(lane.wave_at(point.x())), list(self.limits)
        gap = 2.0 * lane.scale().per_pixel
        limits[held] = min(wave, self.inner[0] - gap) if held == 0 else max(
            wave, self.inner[1] + gap)
        self.limits = (limits[0], limits[1])
        self._dragged(*self.limits, final)

    def paint(self, painter: QPainter, frame, theme) -> None:
        if self.limits is None:
            return
        low, high = (float(x) for x in frame.scale.pixels(np.array(self.limits)))
        if high - low < LEAST * frame.ratio:
            return
        colour = QColor(theme.profile)
        for x, side in ((low, 1.0), (high, -1.0)):
            if -1e4 < x < 3e4:
                _bracket(painter, frame, (np.floor(x) + 0.5, side), colour, QColor(theme.base))
        if self.words:
            say_in(painter, frame, 0.5 * (low + high), self.words, theme)


def _bracket(painter: QPainter, frame, place, colour: QColor, ground: QColor) -> None:
    x, side = place
    r, foot = frame.ratio, side * _FOOT * frame.ratio
    top, bottom = frame.top + 1.5 * r, frame.bottom - 1.5 * r
    painter.setPen(QPen(colour, r))
    draw_lines(painter, np.array([[x, top, x, bottom], [x, top, x + foot, top],
                                  [x, bottom, x + foot, bottom]]))
    width, height = _GRIP[0] * r, _GRIP[1] * r
    middle = frame.top + 0.72 * (frame.bottom - frame.top)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
    painter.setPen(QPen(colour, 1.5 * r))
    painter.setBrush(ground)
    painter.drawRoundedRect(QRectF(x - width / 2, middle - height / 2, width, height), 3 * r, 3 * r)
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)


def say_in(painter: QPainter, frame, x: float, words: str, theme) -> None:
    """A line of words in a box above the foot, its middle at ``x`` or as near as it finds
    room."""
    painter.save()
    font = painter.font()
    font.setPixelSize(max(1, round(12 * frame.ratio)))
    painter.setFont(font)
    box = painter.fontMetrics().boundingRect(words)
    width, height = box.width() + 12 * frame.ratio, box.height() + 6 * frame.ratio
    first, last = frame.scale.origin, frame.scale.origin + frame.scale.width - width
    left = max(min(x - width / 2, last), first)
    place = QRectF(left, frame.bottom - height - 4 * frame.ratio, width, height)
    painter.setPen(QPen(QColor(theme.edge), frame.ratio))
    painter.setBrush(QColor(theme.raised))
    painter.drawRect(place)
    painter.setPen(QColor(theme.ink))
    painter.drawText(place, int(Qt.AlignmentFlag.AlignCenter), words)
    painter.restore()
