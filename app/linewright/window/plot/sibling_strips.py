"""Siblings: other lines of a candidate's species, each a small strip in velocity space."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from PySide6.QtCore import QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QKeyEvent, QMouseEvent, QPainter, QPen
from PySide6.QtWidgets import QSizePolicy, QWidget

from ..theme import LIGHT, Theme
from .extremes import Extremes, PixelScale
from .geometry import Frame, nice_ticks
from .primitives import draw_lines
from .safe_paint import paint_safely
from .spectrum_item import column_lines, draw_run, reduce_part

NONE_EXPECTED = "No siblings: no other line of this species is expected here"
NO_SPECTRUM = "Siblings are cut out of a spectrum, and this session has none"
_COLUMNS = 2
_PAD = 10
_PREFERRED_ROW = 104
_RAW = 40
_SHALLOW = 0.6  # flux at the foot of a strip that shows shallow lines only


@dataclass(frozen=True, eq=False)
class Strip:
    """One sibling line.

    title: what stands above it (its wavelength); note: a word below ('seen', 'in a gap')
    velocity: km/s about the expected place, ascending; flux: divided by the continuum
    predicted: depth in absorption, marked by a short bar; NaN for none
    """

    title: str
    velocity: np.ndarray
    flux: np.ndarray
    note: str = ""
    predicted: float = float("nan")


class SiblingStrips(QWidget):
    """Strips in two columns sharing one velocity axis; zero is the expected place."""

    stripActivated = Signal(int)  # index, by click or Return

    def __init__(self, parent: QWidget | None = None):
        super().__init__(parent)
        self.strips: list[Strip] = []
        self.current = -1
        self.hint = NONE_EXPECTED
        self.bars: dict[int, float] = {}  # y of each bar at a predicted depth, as last painted
        self._parts: list[Extremes] = []
        self._colour = LIGHT.accent
        self._theme: Theme = LIGHT
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setMinimumHeight(90)
        self.setAccessibleName("Siblings: other lines of the species in velocity")

    def set_strips(self, strips: list[Strip], colour: str) -> None:
        """Replace the strips; ``colour`` draws the line at the expected place."""
        self.strips, self._colour = list(strips), colour
        self._parts = [Extremes(strip.velocity, strip.flux) for strip in self.strips]
        self.current = -1
        self.updateGeometry()
        self.update()

    def set_theme(self, theme: Theme) -> None:
        """Change colours at once."""
        self._theme = theme
        self.update()

    def sizeHint(self) -> QSize:
        rows = max(1, -(-len(self.strips) // self._columns))
        return QSize(300, rows * _PREFERRED_ROW + self._axis_height())

    @property
    def _columns(self) -> int:
        return max(1, min(_COLUMNS, len(self.strips)))

    def _axis_height(self) -> int:
        return self.fontMetrics().height() * 2 + 10

    def velocity_range(self) -> tuple[float, float]:
        """Shared (low, high) in km/s."""
        filled = [part.x for part in self._parts if len(part.x)]
        if not filled:
            return -80.0, 80.0
        reach = max(max(abs(x[0]), abs(x[-1])) for x in filled)
        return -float(reach), float(reach)

    def cell(self, index: int) -> QRectF:
        """Place of a strip with its title."""
        rows = max(1, -(-len(self.strips) // self._columns))
        width = self.width() / self._columns
        height = (self.height() - self._axis_height()) / rows
        row, column = divmod(index, self._columns)
        return QRectF(column * width, row * height, width, height)

    def paintEvent(self, _event) -> None:
        paint_safely(self, self._draw)

    def _draw(self, painter: QPainter) -> None:
        painter.fillRect(self.rect(), QColor(self._theme.base))
        font = painter.font()
        font.setPointSizeF(max(7.0, font.pointSizeF() - 1))
        painter.setFont(font)
        if not self.strips:
            painter.setPen(QColor(self._theme.muted))
            flags = Qt.AlignmentFlag.AlignCenter | Qt.TextFlag.TextWordWrap
            painter.drawText(self.rect().adjusted(12, 8, -12, -8), int(flags), self.hint)
            return
        for index in range(len(self.strips)):
            self._draw_strip(painter, index)
        for column in range(self._columns):
            self._draw_axis(painter, column)
        if self.hasFocus() and self.current < 0:
            painter.setPen(QPen(QColor(self._theme.accent), 2))
            painter.drawRect(self.rect().adjusted(1, 1, -1, -1))

    def _draw_strip(self, painter: QPainter, index: int) -> None:
        strip, cell, theme = self.strips[index], self.cell(index), self._theme
        line = painter.fontMetrics().height()
        top = cell.top() + line + 4
        body = QRectF(cell.left() + _PAD, top, cell.width() - 2 * _PAD, cell.bottom() - top - 4)
        self._draw_title(painter, strip, QRectF(body.left(), cell.top() + 2, body.width(), line))
        low, high = self.velocity_range()
        scale = PixelScale(low, high, body.left(), body.width())
        painter.setPen(QPen(QColor(self._colour), 1.6))
        zero = float(np.floor(scale.pixels(0.0))) + 0.5
        draw_lines(painter, np.array([[zero, body.top(), zero, body.bottom()]]))
        if len(self._parts[index].x):
            self._draw_flux(painter, index, scale, body)
        if index == self.current:
            painter.setPen(QPen(QColor(theme.accent), 2 if self.hasFocus() else 1))
            painter.drawRect(cell.adjusted(2, 1, -2, -1))

    def _draw_title(self, painter: QPainter, strip: Strip, room: QRectF) -> None:
        """Wavelength and note in one line above the strip, clear of the curve."""
        metrics = painter.fontMetrics()
        gap, first = metrics.horizontalAdvance("  "), metrics.horizontalAdvance(strip.title)
        note = metrics.elidedText(
            strip.note, Qt.TextElideMode.ElideRight, int(max(room.width() - first - gap, 0)))
        whole = first + (gap + metrics.horizontalAdvance(note) if note else 0)
        left = room.left() + max(0.0, (room.width() - whole) / 2)
        flags = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        painter.setPen(QColor(self._theme.ink))
        painter.drawText(QRectF(left, room.top(), first + 2, room.height()), flags, strip.title)
        painter.setPen(QColor(self._theme.muted))
        place = QRectF(left + first + gap, room.top(), room.right() - left, room.height())
        painter.drawText(place, flags, note)

    def _draw_flux(self, painter: QPainter, index: int, scale, body: QRectF) -> None:
        strip, part = self.strips[index], self._parts[index]
        finite = part.y[np.isfinite(part.y)]
        if len(finite) == 0:
            return
        low, high = min(0.0, float(finite.min())), max(1.1, 1.05 * float(finite.max()))
        if finite.max() < 1.6 and finite.min() > 0.75 and not 1.0 - strip.predicted < _SHALLOW:
            low = _SHALLOW  # the bar at the predicted depth must lie inside
        frame = Frame(scale, body.top(), body.bottom(), low, high, 1.0)
        if strip.predicted == strip.predicted:
            self.bars[index] = float(frame.y(1.0 - strip.predicted))
            x, y = float(scale.pixels(0.0)), self.bars[index]
            painter.setPen(QPen(QColor(self._colour), 1.6))
            draw_lines(painter, np.array([[x - 6, y, x + 6, y]]))
        painter.setPen(QPen(QColor(self._theme.ink), 0))
        reduced = reduce_part(part, scale, raw=_RAW)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, reduced.smooth)
        if reduced.columns is not None:
            draw_lines(painter, column_lines(reduced.columns, frame))
        painter.save()
        painter.setClipRect(body)
        for pixels, flux in reduced.runs:
            draw_run(painter, pixels, frame.y(flux))
        painter.restore()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)

    def _draw_axis(self, painter: QPainter, column: int) -> None:
        cell, theme = self.cell(column), self._theme
        low, high = self.velocity_range()
        scale = PixelScale(low, high, cell.left() + _PAD, cell.width() - 2 * _PAD)
        top = self.height() - self._axis_height() + 2.0
        widest = painter.fontMetrics().horizontalAdvance(f"−{abs(high):.0f}") + 10
        major, minor, decimals = nice_ticks(low, high, 6)
        if len(major) * widest > scale.width or len(major) < 3:
            major = _three(high)
        painter.setPen(QPen(QColor(theme.faint), 0))
        draw_lines(painter, np.array([[scale.origin, top, scale.origin + scale.width, top]]))
        for ticks, length in ((minor, 2.0), (major, 5.0)):
            x = np.floor(scale.pixels(ticks)) + 0.5
            head = np.full(len(x), top)
            draw_lines(painter, np.stack([x, head, x, head + length], axis=1))
        painter.setPen(QColor(theme.ink))
        line = painter.fontMetrics().height()
        for value, x in zip(major, scale.pixels(major)):
            text = f"{value + 0.0:.{decimals}f}".replace("-", "−")
            half = painter.fontMetrics().horizontalAdvance(text) / 2 + 1
            middle = min(max(float(x), cell.left() + half), cell.right() - half)
            box = QRectF(middle - 30, top + 5, 60, line)
            painter.drawText(box, int(Qt.AlignmentFlag.AlignHCenter), text)
        painter.setPen(QColor(theme.muted))
        title = QRectF(cell.left(), top + 5 + line, cell.width(), line)
        painter.drawText(title, int(Qt.AlignmentFlag.AlignHCenter), "km/s")

    def mousePressEvent(self, event: QMouseEvent) -> None:
        for index in range(len(self.strips)):
            if self.cell(index).contains(event.position()):
                self._go(index)
                self.stripActivated.emit(index)

    def _go(self, index: int) -> None:
        if 0 <= index < len(self.strips):
            self.current = index
            self.update()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        key = Qt.Key(event.key())
        shift = {
            Qt.Key.Key_Left: -1, Qt.Key.Key_Right: 1,
            Qt.Key.Key_Up: -self._columns, Qt.Key.Key_Down: self._columns,
        }.get(key)
        if shift is not None:
            self._go(self.current + shift if self.current >= 0 else 0)
        elif key in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space) and self.current >= 0:
            self.stripActivated.emit(self.current)
        else:
            super().keyPressEvent(event)


def _three(reach: float) -> np.ndarray:
    """Zero and the largest 1, 2 or 5 x 10^n inside on either side of it."""
    power = 10.0 ** np.floor(np.log10(reach))
    step = power * max(f for f in (1, 2, 5) if f * power <= reach)
    return np.array([-step, 0.0, step])
