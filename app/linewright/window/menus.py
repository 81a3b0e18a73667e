"""Menus and shortcuts made from the command table."""

from __future__ import annotations

import sys

from PySide6.QtGui import QAction, QKeySequence

from . import layout_memory as memory
from .commands import MENUS, opening


class Menus:
    """One QAction a command; ``refresh`` brings enabled states and ticks up to date."""

    def __init__(self, bench, window):
        self._bench = bench
        self.actions: dict[str, QAction] = {}
        for name in MENUS:
            menu = window.menuBar().addMenu(f"&{name}")
            menu.setToolTipsVisible(True)
            menu.aboutToShow.connect(self.refresh)
            group = 0
            for command in (c for c in bench.commands.values() if c.menu == name):
                if command.group != group:
                    menu.addSeparator()
                    group = command.group
                menu.addAction(self._action(command, window))
                if command.id == "file.open":
                    self._recent = menu.addMenu("Open &recent")
                    self._recent.aboutToShow.connect(self._fill_recent)

    def _action(self, command, window) -> QAction:
        action = QAction(command.title, window)
        action.setShortcuts([QKeySequence(k) for k in command.keys])
        action.setToolTip(command.full_tip)
        action.setStatusTip("")
        action.setCheckable(command.checked is not None)
        if sys.platform == "darwin":  # elsewhere there are no roles
            action.setMenuRole(QAction.MenuRole.NoRole)
        action.triggered.connect(lambda: self._run(command.id))
        self.actions[command.id] = action
        return action

    def _run(self, command_id: str) -> None:
        self._bench.run(command_id)
        self.refresh()

    def refresh(self) -> None:
        for command_id, action in self.actions.items():
            command = self._bench.commands[command_id]
            action.setEnabled(bool(command.enabled(self._bench)))
            if command.checked is not None:
                action.setChecked(action.isEnabled() and bool(command.checked(self._bench)))
        self._name_steps()

    def _name_steps(self) -> None:
        document = self._bench.desk.document if self._bench.desk else None
        for command_id, label in (
                ("edit.undo", document.undo_label if document else ""),
                ("edit.redo", document.redo_label if document else "")):
            title = self._bench.commands[command_id].title
            self.actions[command_id].setText(f"{title}: {label}" if label else title)

    def _fill_recent(self) -> None:
        self._recent.clear()
        for path in memory.recent_files():
            self._recent.addAction(path, lambda p=path: opening.open_files(self._bench, [p]))
        self._recent.setEnabled(True)
        if self._recent.isEmpty():
            self._recent.addAction("nothing yet").setEnabled(False)
