"""The page of the catalogue line looked at: data, siblings, source, and what to do with it."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QSizePolicy,
    QTextBrowser,
    QVBoxLayout,
)

from ...lines.page import LinePage
from .line_page_text import page_html

NO_LINE = "Choose a line to see what is known of it."
NARROW = 100  # characters below which the siblings find no place beside the data
COMMANDS = ("line.claim", "line.rake", "line.go", "line.bibtex")


class LinePageView(QFrame):
    """``lineAsked`` carries the row of a sibling that was clicked."""

    lineAsked = Signal(int)

    def __init__(self, workbench, parent=None):
        super().__init__(parent)
        self._workbench, self.page, self._narrow = workbench, None, False
        self.setAccessibleName("Line page")
        self.title, self.text = QLabel(NO_LINE), QTextBrowser()
        self.title.setObjectName("heading")
        self.title.setTextFormat(Qt.TextFormat.PlainText)
        self.title.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.text.setOpenLinks(False)
        self.text.setFrameShape(QFrame.Shape.NoFrame)
        self.text.setAccessibleName("Data, siblings and source of the line")
        self.text.anchorClicked.connect(lambda url: self.lineAsked.emit(int(url.path())))
        self.buttons = {name: self._button(workbench.commands[name]) for name in COMMANDS}
        head = QHBoxLayout()
        head.setContentsMargins(8, 2, 4, 0)
        head.setSpacing(4)
        head.addWidget(self.title, 1)
        for button in self.buttons.values():
            head.addWidget(button)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(0)
        box.addLayout(head)
        box.addWidget(self.text, 1)

    def _button(self, command) -> QPushButton:
        button = QPushButton(command.short or command.title)
        button.setObjectName("act")
        button.setToolTip(command.full_tip)
        button.setAccessibleName(command.title)
        button.setMinimumWidth(button.fontMetrics().horizontalAdvance(button.text()) + 14)
        button.clicked.connect(lambda: self._workbench.run(command.id))
        return button

    def show_page(self, page: LinePage | None, title: str = "") -> None:
        self.page = page
        self.title.setText(title or (page.title if page else NO_LINE))
        self._fill()
        self.refresh()

    def refresh(self) -> None:
        """Which acts are possible now."""
        for command_id, button in self.buttons.items():
            button.setEnabled(self._workbench.allows(command_id))

    def show_theme(self) -> None:
        self._fill()

    def _fill(self) -> None:
        if self.page is None:
            self.text.clear()
            return
        theme = self._workbench.theme
        self._narrow = self._is_narrow()
        self.text.setHtml(page_html(
            self.page, self._workbench.medium, (theme.accent, theme.muted), self._narrow))

    def _is_narrow(self) -> bool:
        return self.text.width() < NARROW * self.text.fontMetrics().averageCharWidth()

    def resizeEvent(self, event) -> None:  # noqa: N802
        super().resizeEvent(event)
        if self.page is not None and self._is_narrow() != self._narrow:
            self._fill()
