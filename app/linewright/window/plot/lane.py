"""A widget that shares the wavelength axis: repaints once per change of the view."""

from __future__ import annotations

from PySide6.QtGui import QColor, QPainter, QPen
from PySide6.QtWidgets import QWidget

from .extremes import PixelScale
from .geometry import LEFT, RIGHT, lane_scale
from .safe_paint import paint_safely
from .view_state import ViewState

_NARROWEST = LEFT + RIGHT + 24


class Lane(QWidget):
    """Base of the lanes: a change marks dirty, Qt repaints once a frame, ``paints`` counts.

    ``exposed`` is the rectangle of the present paint; ``failed`` holds the traceback of a
    ``draw`` that raised.
    """

    def __init__(self, state: ViewState, parent: QWidget | None = None):
        super().__init__(parent)
        self.state = state
        self.paints = 0
        self.exposed = self.rect()
        self.failed = ""
        state.changed.connect(self.update)

    def paintEvent(self, event) -> None:
        self.paints += 1
        self.exposed = event.rect()
        paint_safely(self, self._paint)

    def _paint(self, painter: QPainter) -> None:
        painter.fillRect(self.exposed, QColor(self.state.theme.base))
        if self.width() >= _NARROWEST:
            self.draw(painter)
        if self.hasFocus():
            painter.setPen(QPen(QColor(self.state.theme.accent), 2))
            painter.drawRect(self.rect().adjusted(1, 1, -1, -1))

    def draw(self, painter: QPainter) -> None:
        """Paint in logical pixels; the background is done."""

    def scale(self, place: tuple[float, float] = (0.0, 1.0)) -> PixelScale:
        """Wavelength scale; default: in logical pixels of this widget."""
        return lane_scale((self.state.low, self.state.high), self.width(), place)

    def wave_at(self, x: float) -> float:
        """Own-medium wavelength under a logical x."""
        inner = max(self.width() - LEFT - RIGHT, 1)
        return self.state.low + (x - LEFT) * (self.state.high - self.state.low) / inner
