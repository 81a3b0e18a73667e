"""The factors of a candidate's odds as bars: to the right for it, to the left against."""

from __future__ import annotations

import math

from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import QSizePolicy, QWidget

GAP = 6  # logical pixels between cells
FULL = math.log(1000.0)  # a factor that fills half a cell


class OddsStrip(QWidget):
    """Four cells side by side: name and factor, and under them the bar."""

    def __init__(self, parent=None):
        super().__init__(parent)
        self.terms: tuple = ()
        self._colours = [QColor("#000000")] * 4
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)

    def sizeHint(self) -> QSize:
        return QSize(200, self._small().height() + 11)

    def _small(self):
        from PySide6.QtGui import QFontMetrics

        return QFontMetrics(self._font())

    def _font(self):
        font = self.font()
        font.setPointSizeF(max(7.0, font.pointSizeF() - 1.5))
        return font

    def show_terms(self, terms, theme) -> None:
        self.terms = terms
        self._colours = [QColor(c) for c in (theme.ink, theme.edge, theme.good, theme.bad)]
        self.setVisible(bool(terms))
        said = "\n".join(f"{t.name} {t.factor}: {t.words}" for t in terms)
        self.setToolTip(f"What the odds against an unlisted line are made of\n{said}")
        self.setAccessibleName("Odds: " + ", ".join(f"{t.name} {t.factor}" for t in terms))
        self.update()

    def _cells(self) -> list[tuple[float, float]]:
        """(left, width) of each: what its words need and an equal part of the rest."""
        need = [self._small().horizontalAdvance(f"{t.name} {t.factor}") for t in self.terms]
        spare = max(self.width() - sum(need) - GAP * len(need), 0) / len(need)
        cells, left = [], 0.0
        for words in need:
            cells.append((left, words + spare))
            left += words + spare + GAP
        return cells

    def paintEvent(self, _event) -> None:
        if not self.terms:
            return
        painter = QPainter(self)
        painter.setFont(self._font())
        ink, edge, good, bad = self._colours
        tall = self._small().height()
        for term, (left, wide) in zip(self.terms, self._cells()):
            cell = QRectF(left, 0, wide, tall)
            painter.setPen(ink)
            painter.drawText(cell, Qt.AlignmentFlag.AlignCenter, f"{term.name} {term.factor}")
            middle, half = cell.center().x(), cell.width() / 2
            painter.fillRect(QRectF(cell.left(), tall + 4, cell.width(), 1), edge)
            length = min(abs(term.log) / FULL, 1.0) * half
            left = middle if term.log >= 0 else middle - length
            painter.fillRect(QRectF(left, tall + 2, length, 5), good if term.log >= 0 else bad)
            painter.fillRect(QRectF(middle - 0.5, tall, 1, 9), ink)
