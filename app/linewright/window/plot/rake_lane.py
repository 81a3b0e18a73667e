"""The Rake: predicted lines hang as teeth under the spectrum and slide with the velocity."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen

from .geometry import LEFT, RIGHT, to_device
from .marks import marker_pixmap
from .navigation import NavigableLane
from .primitives import draw_lines, draw_rects
from .rake_data import RakeData
from .rake_teeth import RakeTeeth

ROW = 22
SMALLEST_ROW = 13
TALLEST = 156
MOST_ROWS = 12
_HEAD = 4
_WIDE_SPACING = 10


class RakeLane(NavigableLane):
    """One row per species shown; tooth length is the predicted depth."""

    def __init__(self, state, parent=None):
        super().__init__(state, parent)
        self.teeth = RakeTeeth(RakeData.empty())
        self.setAccessibleName("Rake: predicted lines of the chosen species")
        self._fit()

    def set_rake(self, rake: RakeData) -> None:
        self.teeth = RakeTeeth(rake)
        self._fit()
        self.update()

    @property
    def shown_rows(self) -> int:
        return min(len(self.teeth.names), MOST_ROWS)

    @property
    def row_height(self) -> int:
        rows = max(self.shown_rows, 1)
        return int(max(SMALLEST_ROW, min(ROW, TALLEST // rows)))

    def _fit(self) -> None:
        self.setFixedHeight(max(self.shown_rows, 1) * self.row_height + _HEAD + 3)
        hidden = len(self.teeth.names) - self.shown_rows
        more = f" {hidden} more species do not fit." if hidden > 0 else ""
        self.setToolTip(
            "Rake: where lines of the chosen species are predicted at this velocity; the "
            "longer a tooth, the deeper the line should be." + more
        )

    def draw(self, painter: QPainter) -> None:
        if self.shown_rows == 0:
            self._draw_empty(painter)
            return
        self._draw_rows(painter)
        painter.setClipRect(QRectF(LEFT, 0, self.width() - LEFT - RIGHT, self.height()))
        x, y, ratio = to_device(painter)
        scale = self.scale((x, ratio))
        for row in range(self.shown_rows):
            self._draw_teeth(painter, row, scale, (y, ratio))

    def _draw_empty(self, painter: QPainter) -> None:
        painter.setPen(QColor(self.state.theme.muted))
        painter.drawText(
            self.rect().adjusted(LEFT + 6, 0, -RIGHT, 0),
            Qt.AlignmentFlag.AlignVCenter,
            "Rake: choose species in the Catalogue and their predicted lines hang here",
        )

    def _draw_rows(self, painter: QPainter) -> None:
        theme, height = self.state.theme, self.row_height
        ratio = painter.device().devicePixelRatioF()
        font = painter.font()
        font.setPointSizeF(max(7.0, font.pointSizeF() - 1))
        painter.setFont(font)
        for row, name in enumerate(self.teeth.names[: self.shown_rows]):
            top = _HEAD + row * height
            painter.setPen(QPen(QColor(theme.edge), 0))
            painter.drawLine(LEFT, top, self.width() - RIGHT, top)
            mark = marker_pixmap(theme.marker(name), theme.colour(name), 1.0, 9, ratio)
            painter.drawPixmap(QPointF(5, top + height / 2 - 4), mark)
            painter.setPen(QColor(theme.text_colour(name)))
            box = QRectF(14, top, LEFT - 20, height)
            flags = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
            painter.drawText(box, int(flags), name)

    def _draw_teeth(self, painter: QPainter, row: int, scale, place) -> None:
        offset, ratio = place
        state = self.state
        at, depth = self.teeth.teeth(row, scale, state.medium, state.velocity)
        top = offset + (_HEAD + row * self.row_height + 1) * ratio
        length = self._length(depth, ratio)
        colour = QColor(state.theme.colour(self.teeth.names[row]))
        self._draw_combs(painter, (at, top, length), colour, ratio)
        gone, depth = self.teeth.missing(row, scale, state.medium, state.velocity)
        if len(gone):
            self._draw_missing(painter, (gone, top + self._length(depth, ratio)), colour, ratio)

    def _length(self, depth, ratio: float) -> np.ndarray:
        return np.round(np.maximum(depth * (self.row_height - 4), 2.0) * ratio)

    def _draw_combs(self, painter: QPainter, comb, colour: QColor, ratio: float) -> None:
        at, top, length = comb
        inner = (self.width() - LEFT - RIGHT) * ratio
        if len(at) * _WIDE_SPACING * ratio < inner:
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(colour)
            wide = np.full(len(at), round(2 * ratio))
            draw_rects(painter, np.stack([at - 0.5, np.full(len(at), top), wide, length], axis=1))
        else:
            painter.setPen(QPen(colour, 0))
            head = np.full(len(at), top)
            draw_lines(painter, np.stack([at, head, at, top + length], axis=1))

    def _draw_missing(self, painter: QPainter, ends, colour: QColor, ratio: float) -> None:
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)
        painter.setPen(QPen(colour, 1.3 * ratio))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        for x, y in zip(*ends):
            painter.drawEllipse(QPointF(x, y), 3 * ratio, 3 * ratio)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)
