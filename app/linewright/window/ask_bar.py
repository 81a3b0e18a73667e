"""One line to type into, above the work: for notes, places and choices; Return does, Esc leaves."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QEvent, Qt, Signal
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QLineEdit, QListWidget, QVBoxLayout

ROWS = 6  # choices seen at once
NARROW = "type to narrow the list, ↑ ↓ move, Return takes the marked one"


class AskBar(QFrame):
    """Not modal: the spectrum can be looked at while the line is open."""

    asked = Signal()

    def __init__(self, parent=None):
        super().__init__(parent)
        self.setObjectName("askBar")
        self._then: Callable[[str], None] = lambda text: None
        self._choices: tuple[str, ...] | None = None
        self._shown: list[int] = []
        self.label, self.edit, self.list = QLabel(self), QLineEdit(self), None
        self.label.setBuddy(self.edit)
        box = QVBoxLayout(self)
        box.setContentsMargins(10, 3, 10, 3)
        row = QHBoxLayout()
        row.addWidget(self.label)
        row.addWidget(self.edit, 1)
        box.addLayout(row)
        self.edit.returnPressed.connect(self._done)
        self.edit.textChanged.connect(self._narrow)
        self.edit.installEventFilter(self)
        self.hide()

    def ask(self, question: str, text: str, hint: str, then: Callable[[str], None]) -> None:
        """A line of text; ``then`` gets it."""
        self._choices = None
        if self.list is not None:
            self.list.hide()
        self._open(question, text, hint, then)

    def choose(self, question: str, choices, then: Callable[[int], None]) -> None:
        """One of several; ``then`` gets its place among ``choices``."""
        self._choices = tuple(choices)
        self._furnish().show()
        self._open(question, "", NARROW, then)
        self._narrow("")

    def _furnish(self) -> QListWidget:
        if self.list is None:
            self.list = QListWidget(self)
            self.list.setFocusPolicy(Qt.FocusPolicy.NoFocus)
            self.list.setAccessibleName("Choices")
            self.list.itemClicked.connect(lambda _item: self._done())
            self.layout().addWidget(self.list)
        return self.list

    def _open(self, question: str, text: str, hint: str, then) -> None:
        self.label.setText(question)
        self.edit.setText(text)
        self.edit.setPlaceholderText(hint)
        self.edit.setAccessibleName(question)
        self._then = then
        self.show()
        self.asked.emit()
        self.edit.setFocus(Qt.FocusReason.ShortcutFocusReason)
        self.edit.selectAll()

    def _narrow(self, text: str) -> None:
        """The choices that hold every word typed."""
        if self._choices is None:
            return
        words = text.lower().split()
        self._shown = [k for k, choice in enumerate(self._choices)
                       if all(w in choice.lower() for w in words)]
        self.list.clear()
        self.list.addItems([self._choices[k] for k in self._shown])
        rows = min(max(len(self._shown), 1), ROWS)
        self.list.setFixedHeight(rows * max(self.list.sizeHintForRow(0), 1) + 6)
        self.list.setCurrentRow(0)

    def _done(self) -> None:
        if self._choices is None:
            self.hide()
            self._then(self.edit.text())
        elif 0 <= self.list.currentRow() < len(self._shown):
            chosen = self._shown[self.list.currentRow()]
            self.hide()
            self._then(chosen)

    def eventFilter(self, watched, event) -> bool:
        """Arrows move the mark while the line keeps the keyboard."""
        if (self._choices is not None and event.type() == QEvent.Type.KeyPress
                and event.key() in (Qt.Key.Key_Down, Qt.Key.Key_Up)):
            step = 1 if event.key() == Qt.Key.Key_Down else -1
            row = self.list.currentRow() + step
            self.list.setCurrentRow(min(max(row, 0), len(self._shown) - 1))
            return True
        return super().eventFilter(watched, event)

    def keyPressEvent(self, event) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.hide()
        else:
            super().keyPressEvent(event)
