"""One ranked candidate in the Evidence panel: name, probability bar, numbers, reasons."""

from __future__ import annotations

from PySide6.QtCore import QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import QFrame, QGridLayout, QLabel, QSizePolicy, QWidget

from .odds_strip import OddsStrip


class ProbabilityBar(QWidget):
    """A bar from 0 to 1 with a tick at 0.5 and 0.95, where standings change."""

    def __init__(self, parent=None):
        super().__init__(parent)
        self._value, self._colour, self._ground = 0.0, QColor("#0072b2"), QColor("#d3d9df")
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setToolTip("Probability that this is the main contributor; ticks at 0.50 and 0.95")

    def sizeHint(self) -> QSize:
        return QSize(90, 12)

    def show_value(self, value: float, colour: str, ground: str) -> None:
        self._value, self._colour, self._ground = value, QColor(colour), QColor(ground)
        self.update()

    def paintEvent(self, _event) -> None:
        painter = QPainter(self)
        width, middle = self.width(), self.height() / 2
        painter.fillRect(QRectF(0, middle - 3, width, 6), self._ground)
        painter.fillRect(QRectF(0, middle - 3, width * self._value, 6), self._colour)
        painter.setPen(self._ground.darker(130))
        for tick in (0.5, 0.95):
            x = int(tick * width)
            painter.drawLine(x, int(middle) - 5, x, int(middle) + 5)


class CandidateRow(QFrame):
    """Click, Space or Return chooses it; the chosen one shows its reasons."""

    chosen = Signal(int)

    def __init__(self, rank: int, parent=None):
        super().__init__(parent)
        self.rank = rank
        self.setObjectName("candidateRow")
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setCursor(Qt.CursorShape.PointingHandCursor)
        self.name, self.bar, self.number = QLabel(self), ProbabilityBar(self), QLabel(self)
        self.detail, self.why, self.odds = QLabel(self), QLabel(self), OddsStrip(self)
        self.detail.setObjectName("quiet")
        self.why.setObjectName("reasons")
        self.number.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        self.number.setMinimumWidth(self.fontMetrics().horizontalAdvance("> 0.99"))
        self.name.setMinimumWidth(self.fontMetrics().horizontalAdvance("[Fe III] 00000.000"))
        for label in (self.detail, self.why):
            label.setWordWrap(True)
            label.setTextFormat(Qt.TextFormat.PlainText)
        grid = QGridLayout(self)
        grid.setContentsMargins(6, 2, 6, 2)
        grid.setHorizontalSpacing(8)
        grid.setVerticalSpacing(0)
        grid.addWidget(self.name, 0, 0)
        grid.addWidget(self.bar, 0, 1)
        grid.addWidget(self.number, 0, 2)
        grid.addWidget(self.detail, 1, 0, 1, 3)
        grid.addWidget(self.odds, 2, 0, 1, 3)
        grid.addWidget(self.why, 3, 0, 1, 3)
        grid.setColumnStretch(1, 1)

    def show_chosen(self, chosen: bool) -> None:
        if self.property("chosen") == chosen:
            return
        self.setProperty("chosen", chosen)
        self.style().unpolish(self)
        self.style().polish(self)

    def mousePressEvent(self, _event) -> None:
        self.setFocus(Qt.FocusReason.MouseFocusReason)
        self.chosen.emit(self.rank)

    def keyPressEvent(self, event) -> None:
        plain = event.modifiers() == Qt.KeyboardModifier.NoModifier
        if plain and event.key() in (Qt.Key.Key_Space, Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.chosen.emit(self.rank)
        else:
            super().keyPressEvent(event)
