"""Wheel and drag on the lanes: the same gestures wherever the wavelength axis reaches."""

from __future__ import annotations

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QMouseEvent, QWheelEvent

from .lane import Lane

PER_NOTCH = 1.25
_DRAG_FROM = 4.0


class NavigableLane(Lane):
    """Wheel zooms wavelength about the pointer, with Shift the flux; drag pans; click."""

    def __init__(self, state, parent=None):
        super().__init__(state, parent)
        self._pressed: QPointF | None = None
        self._dragged_from: tuple[float, float] | None = None

    def wheelEvent(self, event: QWheelEvent) -> None:
        turn = event.angleDelta()
        notches = (turn.y() or turn.x()) / 120.0
        if event.modifiers() & Qt.KeyboardModifier.ShiftModifier:
            self.zoom_flux(PER_NOTCH**notches, event.position().y())
        elif turn.y() == 0:
            self.state.step(-0.1 * notches)
        else:
            self.state.zoom(PER_NOTCH**notches, self.wave_at(event.position().x()))
        event.accept()

    def zoom_flux(self, factor: float, y: float) -> None:
        """Overridden where flux is drawn."""

    def mousePressEvent(self, event: QMouseEvent) -> None:
        if event.button() == Qt.MouseButton.LeftButton:
            self._pressed = event.position()
            self._dragged_from = None

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        if self._pressed is None:
            return
        moved = event.position() - self._pressed
        if self._dragged_from is None and abs(moved.x()) < _DRAG_FROM:
            return
        if self._dragged_from is None:
            self._dragged_from = (self.state.low, self.state.high)
            self.setCursor(Qt.CursorShape.ClosedHandCursor)
        low, high = self._dragged_from
        shift = moved.x() * self.scale().per_pixel
        self.state.set_view(low - shift, high - shift)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        if event.button() != Qt.MouseButton.LeftButton or self._pressed is None:
            return
        clicked = self._dragged_from is None
        self._pressed = self._dragged_from = None
        self.unsetCursor()
        if clicked:
            self.click(event.position())

    def click(self, point: QPointF) -> None:
        """A press and release without a drag."""
