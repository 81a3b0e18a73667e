"""Work for the window's thread in steps, one a frame, so that none is late."""

from __future__ import annotations

from collections import deque
from collections.abc import Callable

from PySide6.QtCore import QObject, QTimer


class Steps(QObject):
    """A new list replaces what is left of the one before."""

    def __init__(self, parent: QObject | None = None):
        super().__init__(parent)
        self._left: deque[Callable[[], None]] = deque()
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.setInterval(1)
        self._timer.timeout.connect(self._next)

    def run(self, steps: list[Callable[[], None]], spread: bool = False) -> None:
        """All at once, or the first now and the others between frames."""
        self._timer.stop()
        self._left = deque(steps)
        while self._left and not spread:
            self._left.popleft()()
        if self._left:
            self._next()

    @property
    def pending(self) -> bool:
        return bool(self._left)

    def _next(self) -> None:
        if self._left:
            self._left.popleft()()
        if self._left:
            self._timer.start()
