"""Rendered labels and markers side by side in two pictures, each blitted in one call.

Text drawn under a rotation costs far more than its pixels, and blending costs three times
copying: each label is rendered once on the plot's ground into an opaque slot and then only
copied. Markers may touch one another, so theirs is a picture with an alpha channel.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import shiboken6
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QFont, QPainter, QPixmap

from .safe_paint import painting

_COLUMNS, _ROWS = 128, 5
MARKER_KINDS = 64


@dataclass(frozen=True)
class LabelContent:
    """What a label slot shows."""

    text: str
    colour: str
    ground: str


class LabelAtlas:
    """Slots for labels (width x height) and markers, sizes in logical pixels.

    ``used`` counts the label slots taken; setting it to 0 empties the atlas. The slot
    after the last is kept for the selected label.
    """

    slots = _COLUMNS * _ROWS - 1

    def __init__(self, font: QFont, sizes: tuple[float, float, float], look: tuple[float, str]):
        """sizes: label width and height, marker; look: (device ratio, ground colour)."""
        self._font, (self._ratio, self._ground) = QFont(font), look
        self._font.setStyleStrategy(QFont.StyleStrategy.NoSubpixelAntialias)
        self.width, self.height, self.marker = (round(s * self._ratio) for s in sizes)
        self._labels = QPixmap(_COLUMNS * self.width, _ROWS * self.height)
        self._labels.fill(QColor(self._ground))
        self._markers = QPixmap(MARKER_KINDS * self.marker, self.marker)
        self._markers.fill(Qt.GlobalColor.transparent)
        self._kinds: dict[tuple, int] = {}
        self.used = 0
        self._chosen: int | None = None

    def add(self, content: LabelContent) -> int:
        """Render into the next free slot and return it."""
        slot = self.used
        self.used += 1
        self._render(slot, content)
        return slot

    def set_chosen(self, row: int, content: LabelContent) -> int:
        """Slot of the selected label, rendered when the selection changed."""
        if row != self._chosen:
            self._render(self.slots, content)
            self._chosen = row
        return self.slots

    def forget_chosen(self) -> None:
        """The selected label's text or colour may have changed."""
        self._chosen = None

    def marker_kind(self, key: tuple, make) -> int:
        """Place of a marker; ``make()`` gives its picture when it is new."""
        if key not in self._kinds:
            place = self._kinds[key] = len(self._kinds) % MARKER_KINDS
            box = QRectF(place * self.marker, 0, self.marker, self.marker)
            picture = make()
            with painting(self._markers) as painter:
                painter.drawPixmap(box, picture, QRectF(picture.rect()))
        return self._kinds[key]

    def _corner(self, slot):
        return (slot % _COLUMNS) * self.width, (slot // _COLUMNS) * self.height

    def _render(self, slot: int, content: LabelContent) -> None:
        with painting(self._labels) as painter:
            self._write(painter, self._corner(slot), content)

    def _write(self, painter: QPainter, corner: tuple, content: LabelContent) -> None:
        left, top = corner
        box = QRectF(left, top, self.width, self.height)
        painter.setClipRect(box)
        painter.fillRect(box, QColor(self._ground))
        painter.setFont(self._font)
        painter.translate(left, top + self.height)
        painter.rotate(-90)
        painter.scale(self._ratio, self._ratio)
        line, room = self.width / self._ratio, self.height / self._ratio
        if content.ground:
            length = painter.fontMetrics().horizontalAdvance(content.text) + 4
            painter.fillRect(QRectF(0, 0, length, line), QColor(content.ground))
        painter.setPen(QColor(content.colour))
        flags = int(Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignLeft)
        painter.drawText(QRectF(2, 0, room, line), flags, content.text)

    def blit_labels(self, painter: QPainter, slots: np.ndarray, column, top: int) -> None:
        """Copy label slots about device-pixel columns, from device row ``top`` down."""
        rows = np.ones((len(slots), 10))
        rows[:, 0] = column + 0.5 * (self.width % 2)
        rows[:, 1] = top + 0.5 * self.height
        rows[:, 2], rows[:, 3] = self._corner(slots)
        rows[:, 4], rows[:, 5], rows[:, 8] = self.width, self.height, 0.0
        _draw(painter, rows, self._labels)

    def blit_markers(self, painter: QPainter, kinds: np.ndarray, column, top: int) -> None:
        """Copy markers about device-pixel columns, from device row ``top`` down."""
        rows = np.ones((len(kinds), 10))
        rows[:, 0] = column + 0.5 * (self.marker % 2)
        rows[:, 1] = top + 0.5 * self.marker
        rows[:, 2], rows[:, 3] = kinds * self.marker, 0.0
        rows[:, 4], rows[:, 5], rows[:, 8] = self.marker, self.marker, 0.0
        _draw(painter, rows, self._markers)


def _draw(painter: QPainter, rows: np.ndarray, picture: QPixmap) -> None:
    """Rows of centre, source rectangle, scales, rotation, opacity."""
    if len(rows):
        first = shiboken6.Shiboken.wrapInstance(rows.ctypes.data, QPainter.PixmapFragment)
        painter.drawPixmapFragments(first, len(rows), picture)
