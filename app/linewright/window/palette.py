"""The command palette: type a few letters, Return runs; made from the command table."""

from __future__ import annotations

from PySide6.QtCore import QEvent, Qt
from PySide6.QtWidgets import QFrame, QLineEdit, QListWidget, QListWidgetItem, QVBoxLayout


def matching(commands, text: str) -> list:
    """Commands whose title, menu or tip hold every word of the text; titles first."""
    words = text.lower().split()
    found = []
    for command in commands:
        title = f"{command.menu} {command.title}".lower()
        whole = f"{title} {command.tip.lower()}"
        if all(w in whole for w in words):
            found.append((not all(w in title for w in words), command))
    return [command for _later, command in sorted(found, key=lambda pair: pair[0])]


class Palette(QFrame):
    """Drops from the top of the window and leaves with Esc or a click elsewhere."""

    def __init__(self, bench, parent):
        super().__init__(parent, Qt.WindowType.Popup)
        self.setObjectName("palette")
        self._bench = bench
        self.edit, self.list = QLineEdit(self), QListWidget(self)
        self.edit.setPlaceholderText("What do you want to do?")
        self.edit.setAccessibleName("Find a command")
        self.list.setAccessibleName("Commands")
        self.list.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        box = QVBoxLayout(self)
        box.setContentsMargins(6, 6, 6, 6)
        box.addWidget(self.edit)
        box.addWidget(self.list)
        self.edit.textChanged.connect(self._fill)
        self.edit.returnPressed.connect(self._run)
        self.list.itemClicked.connect(lambda _item: self._run())
        self.edit.installEventFilter(self)

    def open_over(self, widget) -> None:
        width = min(560, widget.width() - 40)
        corner = widget.mapToGlobal(widget.rect().topLeft())
        self.setGeometry(corner.x() + (widget.width() - width) // 2, corner.y() + 40, width, 360)
        self.edit.clear()
        self._fill("")
        self.show()
        self.edit.setFocus(Qt.FocusReason.PopupFocusReason)

    def _fill(self, text: str) -> None:
        self.list.clear()
        for command in matching(self._bench.commands.values(), text):
            keys = f"    {command.keys[0]}" if command.keys else ""
            item = QListWidgetItem(f"{command.menu}: {command.title}{keys}")
            item.setData(Qt.ItemDataRole.UserRole, command.id)
            item.setToolTip(command.tip)
            if not command.enabled(self._bench):
                item.setFlags(Qt.ItemFlag.NoItemFlags)
            self.list.addItem(item)
        self._move(1, from_row=-1)

    def _move(self, step: int, from_row: int | None = None) -> None:
        row = (self.list.currentRow() if from_row is None else from_row) + step
        while 0 <= row < self.list.count():
            if self.list.item(row).flags() & Qt.ItemFlag.ItemIsEnabled:
                self.list.setCurrentRow(row)
                return
            row += step

    def _run(self) -> None:
        item = self.list.currentItem()
        if item is not None:
            self.hide()
            self._bench.run(item.data(Qt.ItemDataRole.UserRole))

    def eventFilter(self, watched, event) -> bool:
        if event.type() == QEvent.Type.KeyPress and event.key() in (
                Qt.Key.Key_Down, Qt.Key.Key_Up):
            self._move(1 if event.key() == Qt.Key.Key_Down else -1)
            return True
        return super().eventFilter(watched, event)
