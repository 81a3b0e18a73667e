"""One line to type into, above the work: for notes and places; Return does, Esc leaves."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QLineEdit


class AskBar(QFrame):
    """Not modal: the spectrum can be looked at while the line is open."""

    asked = Signal()

    def __init__(self, parent=None):
        super().__init__(parent)
        self.setObjectName("askBar")
        self._then: Callable[[str], None] = lambda text: None
        self.label, self.edit = QLabel(self), QLineEdit(self)
        self.label.setBuddy(self.edit)
        row = QHBoxLayout(self)
        row.setContentsMargins(10, 3, 10, 3)
        row.addWidget(self.label)
        row.addWidget(self.edit, 1)
        self.edit.returnPressed.connect(self._done)
        self.hide()

    def ask(self, question: str, text: str, hint: str, then: Callable[[str], None]) -> None:
        from PySide6.QtCore import Qt

        self.label.setText(question)
        self.edit.setText(text)
        self.edit.setPlaceholderText(hint)
        self.edit.setAccessibleName(question)
        self._then = then
        self.show()
        self.asked.emit()
        self.edit.setFocus(Qt.FocusReason.ShortcutFocusReason)
        self.edit.selectAll()

    def _done(self) -> None:
        self.hide()
        self._then(self.edit.text())

    def keyPressEvent(self, event) -> None:
        from PySide6.QtCore import Qt

        if event.key() == Qt.Key.Key_Escape:
            self.hide()
        else:
            super().keyPressEvent(event)
