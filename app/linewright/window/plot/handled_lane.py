"""A lane with things on it that the pointer can take hold of."""

from __future__ import annotations

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QMouseEvent

from .navigation import NavigableLane

_MOVED = 2.0  # pixels before a press on a handle is a drag


class Grip:
    """Base of what can be held. Points are logical pixels of the lane.

    ``cursor`` shows over it.
    """

    cursor = Qt.CursorShape.SizeHorCursor

    def at(self, point: QPointF, lane):
        """What of it is under the pointer; None for nothing."""

    def touch(self, held) -> None:
        """The pointer rests on it: what a drag will need can be made ready."""

    def drag(self, held, point: QPointF, lane, final: bool) -> None:
        """Moved to ``point``; final: let go there."""

    def clicked(self, held, point: QPointF, lane) -> bool:
        """A click; True when it was meant for this. held: as ``at`` gave it."""
        return False

    def headroom(self, low: float, high: float) -> float | None:
        """Flux that the automatic scale must reach for it between two wavelengths."""

    def paint(self, painter, frame, theme) -> None:
        """Draw in device pixels."""


class HandledLane(NavigableLane):
    """Drags that begin on a Grip move it; all others move the view."""

    def __init__(self, state, parent=None):
        super().__init__(state, parent)
        self.grips: list[Grip] = []
        self._held: tuple | None = None
        self._moved = False
        self.setMouseTracking(True)

    @property
    def held(self) -> bool:
        """Whether something is being dragged: the flux scale stands still meanwhile."""
        return self._held is not None

    def _under(self, point: QPointF):
        for grip in reversed(self.grips):
            held = grip.at(point, self)
            if held is not None:
                return grip, held
        return None

    def mousePressEvent(self, event: QMouseEvent) -> None:
        if event.button() == Qt.MouseButton.LeftButton:
            under = self._under(event.position())
            if under is not None:
                self._held, self._moved = (*under, event.position()), False
                under[0].touch(under[1])
                return
        super().mousePressEvent(event)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        if self._held is None:
            if event.buttons() == Qt.MouseButton.NoButton:
                self._hover(event.position())
            super().mouseMoveEvent(event)
            return
        grip, held, start = self._held
        if not self._moved and (event.position() - start).manhattanLength() < _MOVED:
            return
        self._moved = True
        grip.drag(held, event.position(), self, False)
        self.update()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        if event.button() != Qt.MouseButton.LeftButton or self._held is None:
            super().mouseReleaseEvent(event)
            return
        grip, held, _start = self._held
        self._held = None
        if self._moved:
            grip.drag(held, event.position(), self, True)
        elif not grip.clicked(held, event.position(), self):
            self.click(event.position())
        self.update()

    def _hover(self, point: QPointF) -> None:
        under = self._under(point)
        if under is None:
            self.unsetCursor()
        else:
            self.setCursor(under[0].cursor)
            under[0].touch(under[1])
