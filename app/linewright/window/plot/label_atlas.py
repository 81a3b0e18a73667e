"""Rendered labels and markers side by side in one picture, blitted in one call.

Text drawn under a rotation costs far more than its pixels: each label is rendered once
into an upright slot of the atlas, its family marker under it, and then only copied.
"""

from __future__ import annotations

import numpy as np
import shiboken6
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QFont, QPainter, QPixmap

SLOTS = 640


class LabelAtlas:
    """Slots of ``size`` (width, text height, marker size) logical pixels at one ratio."""

    def __init__(self, font: QFont, size: tuple[float, float, float], ratio: float):
        self._font, self.ratio = font, ratio
        self.width, self.height, self.marker = (int(round(s * ratio)) for s in size)
        self._columns = 128
        rows = -(-SLOTS // self._columns)
        self._slot_height = self.height + self.marker
        self._picture = QPixmap(self._columns * self.width, rows * self._slot_height)
        self._picture.fill(Qt.GlobalColor.transparent)
        self._used: dict[tuple, int] = {}

    def slot(self, key: tuple, make) -> int:
        """Slot of ``key``; ``make()`` gives (text, colour, ground, marker picture) if new."""
        slot = self._used.get(key)
        if slot is None:
            if len(self._used) >= SLOTS:
                self._used.clear()
            slot = self._used[key] = len(self._used)
            self._render(slot, *make())
        return slot

    def room_for(self, keys) -> bool:
        """Whether all keys fit beside what is there (else the atlas must be emptied)."""
        return len(self._used) + sum(key not in self._used for key in keys) <= SLOTS

    def clear(self) -> None:
        self._used.clear()

    def _corner(self, slot):
        return (slot % self._columns) * self.width, (slot // self._columns) * self._slot_height

    def _render(self, slot: int, text: str, colour: str, ground: str, marker: QPixmap) -> None:
        left, top = self._corner(slot)
        painter = QPainter(self._picture)
        painter.setCompositionMode(QPainter.CompositionMode.CompositionMode_Source)
        box = QRectF(left, top, self.width, self._slot_height)
        painter.fillRect(box, Qt.GlobalColor.transparent)
        painter.setCompositionMode(QPainter.CompositionMode.CompositionMode_SourceOver)
        painter.setClipRect(box)
        marker_left = left + (self.width - self.marker) // 2
        painter.drawPixmap(
            QRectF(marker_left, top + self.height, self.marker, self.marker),
            marker,
            QRectF(0, 0, marker.width(), marker.height()),
        )
        painter.setFont(self._font)
        painter.setPen(QColor(colour))
        painter.translate(left, top + self.height)
        painter.rotate(-90)
        painter.scale(self.ratio, self.ratio)
        line, room = self.width / self.ratio, self.height / self.ratio
        if ground:
            length = painter.fontMetrics().horizontalAdvance(text) + 4
            painter.fillRect(QRectF(0, 0, length, line), QColor(ground))
        flags = int(Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignLeft)
        painter.drawText(QRectF(2, 0, room, line), flags, text)
        painter.end()

    def blit(self, painter: QPainter, slots: np.ndarray, label_at, marker_at) -> None:
        """Copy slots with labels and markers centred at (x, y) arrays, device pixels."""
        left, top = self._corner(slots)
        width, tall, small = self.width, self.height, self.marker
        size = np.ones(len(slots))
        labels = _fragments(label_at, (left, top), (width * size, tall * size))
        inset = (width - small) // 2
        markers = _fragments(marker_at, (left + inset, top + tall), (small * size, small * size))
        both = np.ascontiguousarray(np.concatenate([markers, labels]))
        if len(both):
            first = shiboken6.Shiboken.wrapInstance(both.ctypes.data, QPainter.PixmapFragment)
            painter.drawPixmapFragments(first, len(both), self._picture)


def _fragments(centre, corner, size) -> np.ndarray:
    """Rows of QPainter.PixmapFragment: centre, source rectangle, scales, rotation, opacity."""
    one, zero = np.ones(len(size[0])), np.zeros(len(size[0]))
    return np.stack([*centre, *corner, *size, one, one, zero, one], axis=1).astype(float)
