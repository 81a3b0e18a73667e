"""Quiet notices: one bar above the work, with cause, cure and at most three buttons."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from PySide6.QtCore import QTimer, Signal
from PySide6.QtWidgets import QFrame, QHBoxLayout, QPushButton

GLYPHS = {"note": "i", "warning": "!", "refused": "×"}


@dataclass(frozen=True)
class Notice:
    """text: cause and cure; kind: note, warning or refused; buttons: (label, act)

    seconds: it leaves by itself after this long, 0 for never; topic: a newer notice of
    the same topic replaces it
    """

    text: str
    kind: str = "note"
    buttons: tuple[tuple[str, Callable[[], None]], ...] = ()
    seconds: float = 0.0
    topic: str = ""


class NoticeBar(QFrame):
    """Shows the newest notice; closing it brings back the one before."""

    changed = Signal()

    def __init__(self, parent=None):
        super().__init__(parent)
        self.setObjectName("noticeBar")
        self.setAccessibleName("Notice")
        self._waiting: list[Notice] = []
        self._buttons: list[QPushButton] = []
        self._row = self._timer = None
        self.hide()

    def _furnish(self) -> None:
        """Made when the first notice comes: the welcome page should not wait for it."""
        from PySide6.QtCore import Qt
        from PySide6.QtWidgets import QLabel, QSizePolicy, QToolButton

        self._row = QHBoxLayout(self)
        self._row.setContentsMargins(10, 3, 4, 3)
        self._glyph, self._text = QLabel(self), QLabel(self)
        self._glyph.setObjectName("noticeGlyph")
        self._text.setWordWrap(True)
        self._text.setTextFormat(Qt.TextFormat.PlainText)
        self._text.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self._text.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self._close = QToolButton(self)
        self._close.setText("×")
        self._close.setAutoRaise(True)
        self._close.setToolTip("Close this notice (Esc)")
        self._close.setAccessibleName("Close notice")
        self._close.clicked.connect(self.dismiss)
        for widget in (self._glyph, self._text, self._close):
            self._row.addWidget(widget)
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.timeout.connect(self.dismiss)

    @property
    def current(self) -> Notice | None:
        return self._waiting[-1] if self._waiting else None

    def show_notice(self, notice: Notice) -> None:
        if notice.topic:
            self._waiting = [n for n in self._waiting if n.topic != notice.topic]
        self._waiting = [n for n in self._waiting if not n.seconds][-4:] + [notice]
        self._present()

    def dismiss(self) -> None:
        if self._waiting:
            self._waiting.pop()
        self._present()

    def withdraw(self, topic: str) -> None:
        """Removes what was said on a topic that is settled."""
        if any(n.topic == topic for n in self._waiting):
            self._waiting = [n for n in self._waiting if n.topic != topic]
            self._present()

    def _present(self) -> None:
        if self._row is None:
            self._furnish()
        self._timer.stop()
        for button in self._buttons:
            self._row.removeWidget(button)
            button.hide()
            button.deleteLater()
        self._buttons = []
        notice = self.current
        self.setVisible(notice is not None)
        self.changed.emit()
        if notice is None:
            return
        self.setProperty("kind", notice.kind)
        for part in (self, self._glyph):  # the colours depend on the kind
            self.style().unpolish(part)
            self.style().polish(part)
        self._glyph.setText(GLYPHS[notice.kind])
        self._text.setText(notice.text)
        self.setAccessibleDescription(notice.text)
        for label, act in notice.buttons:
            self._add_button(label, act)
        if notice.seconds:
            self._timer.start(int(1000 * notice.seconds))

    def _add_button(self, label: str, act: Callable[[], None]) -> None:
        button = QPushButton(label, self)
        button.clicked.connect(self.dismiss)
        button.clicked.connect(lambda: act())
        self._row.insertWidget(self._row.count() - 1, button)
        self._buttons.append(button)
