"""Waits for what other programs offer, without holding the window."""

from __future__ import annotations

import queue
from collections.abc import Callable

from PySide6.QtCore import QCoreApplication, QObject, QTimer

EVERY_MS = 300


class Listener(QObject):
    """Looks at the exchange's offers a few times a second until closed."""

    def __init__(self, parent: QObject, exchange, offered: Callable[[object], None]):
        super().__init__(parent)
        self._exchange, self._offered = exchange, offered
        self._timer = QTimer(self)
        self._timer.setInterval(EVERY_MS)
        self._timer.timeout.connect(self._look)
        self._timer.start()
        QCoreApplication.instance().aboutToQuit.connect(self.close)

    def _look(self) -> None:
        while True:
            try:
                offer = self._exchange.offers.get_nowait()
            except queue.Empty:
                return
            self._offered(offer)

    def close(self) -> None:
        """Leaves the hub; a second call does nothing."""
        self._timer.stop()
        exchange, self._exchange = self._exchange, None
        if exchange is not None:
            exchange.close()
