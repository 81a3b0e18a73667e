"""The application: checks what Qt needs, then opens the window."""

from __future__ import annotations

import sys

from .needs import complaint

CANNOT_OPEN = 3


def run(files: list[str]) -> int:
    """Opens the window on spectra or sessions; the welcome page when none is named.

    Returns the exit status: 3, with one line on stderr, when the system lacks libraries
    or a display.
    """
    trouble = complaint()
    if trouble:
        print(f"linewright: {trouble}", file=sys.stderr)
        return CANNOT_OPEN
    app = application(files)
    window = new_window()
    window.show()
    open_later(window, files)
    return app.exec()


def application(arguments: list[str]):
    """The QApplication with readable fonts on any machine."""
    from PySide6.QtWidgets import QApplication

    from .theme import ensure_fonts

    app = QApplication.instance() or QApplication(["linewright", *arguments])
    app.setApplicationName("Linewright")
    app.setOrganizationName("Linewright")
    app.setStyle("Fusion")
    ensure_fonts(app)
    return app


def new_window():
    from .main_window import MainWindow
    from .troubles import install_hook

    window = MainWindow()
    install_hook(window.report_unexpected)
    return window


def open_later(window, files: list[str]) -> None:
    """After the first paint: named files, or the drawing library while nothing is asked."""
    from PySide6.QtCore import QTimer

    from .commands import opening

    if files:
        QTimer.singleShot(0, lambda: opening.open_files(window.bench, files))
