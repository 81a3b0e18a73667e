"""A scroll area whose contents are as tall as their wrapped words need."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QScrollArea, QVBoxLayout, QWidget


class TallArea(QScrollArea):
    """Widgets one under the other; ``fit`` after their words changed."""

    def __init__(self, widgets, parent=None):
        super().__init__(parent)
        self._widgets, inside = tuple(widgets), QWidget()
        inside.setObjectName("candidates")
        self._box = QVBoxLayout(inside)
        self._box.setContentsMargins(0, 0, 0, 0)
        self._box.setSpacing(2)
        for widget in self._widgets:
            self._box.addWidget(widget)
        self._box.addStretch(1)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setWidgetResizable(True)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setWidget(inside)

    def fit(self) -> None:
        """Nested layouts keep the heights of words they showed before they were hidden: asked
        anew, and held as the least height of the contents."""
        width = self.viewport().width()
        total = 0
        for widget in self._widgets:
            if widget.isVisibleTo(self.widget()):
                total += _height(widget, width) + self._box.spacing()
        if total != self.widget().minimumHeight():
            self.widget().setMinimumHeight(total)
        self._box.invalidate()

    def resizeEvent(self, event) -> None:
        super().resizeEvent(event)
        self.fit()


def _height(widget: QWidget, width: int) -> int:
    layout = widget.layout()
    if layout is not None:
        layout.invalidate()
    needed = layout.heightForWidth(width) if layout is not None else widget.heightForWidth(width)
    return needed if needed > 0 else widget.sizeHint().height()
