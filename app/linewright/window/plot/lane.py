"""A widget that shares the wavelength axis: repaints once per change of the view."""

from __future__ import annotations

import sys
import traceback

from PySide6.QtGui import QColor, QPainter, QPen
from PySide6.QtWidgets import QWidget

from .extremes import PixelScale
from .geometry import LEFT, RIGHT, lane_scale
from .view_state import ViewState


class Lane(QWidget):
    """Base of the lanes: change marks dirty, Qt repaints once a frame, ``paints`` counts.

    A failing ``draw`` is reported once and leaves an empty lane: an exception must not
    leave paintEvent with an active painter.
    """

    def __init__(self, state: ViewState, parent: QWidget | None = None):
        super().__init__(parent)
        self.state = state
        self.paints = 0
        self.exposed = self.rect()
        self._failed = ""
        state.changed.connect(self.update)

    def paintEvent(self, event) -> None:
        self.paints += 1
        self.exposed = event.rect()
        painter = QPainter(self)
        try:
            painter.fillRect(self.exposed, QColor(self.state.theme.base))
            self.draw(painter)
            if self.hasFocus():
                painter.setPen(QPen(QColor(self.state.theme.accent), 2))
                painter.drawRect(self.rect().adjusted(1, 1, -1, -1))
        except Exception:
            self._report(traceback.format_exc())
        finally:
            painter.end()

    def draw(self, painter: QPainter) -> None:
        """Paint in logical pixels; the background is done."""

    def _report(self, text: str) -> None:
        if text != self._failed:
            self._failed = text
            sys.stderr.write(text)

    def scale(self, place: tuple[float, float] = (0.0, 1.0)) -> PixelScale:
        """Wavelength scale; default: in logical pixels of this widget."""
        return lane_scale((self.state.low, self.state.high), self.width(), place)

    def wave_at(self, x: float) -> float:
        """Own-medium wavelength under a logical x."""
        inner = max(self.width() - LEFT - RIGHT, 1)
        return self.state.low + (x - LEFT) * (self.state.high - self.state.low) / inner
