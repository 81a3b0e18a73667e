"""Open the window on spectra or sessions (the bare form of the command)."""

from __future__ import annotations

import importlib
from pathlib import Path

from ..errors import InputRefused
from .parsing import say

NO_WINDOW = 3


def run(files: list[str]) -> int:
    """Exit status of the window, or 3 with one line where none can be shown."""
    for name in files:
        if not Path(name).exists():
            raise InputRefused(name, "no such file or command", "see linewright --help")
    try:
        # by name: the command line must not depend on the window's room
        complaint = importlib.import_module("linewright.window.needs").complaint()
        if complaint:
            say(complaint)
            return NO_WINDOW
        app = importlib.import_module("linewright.window.app")
    except ImportError as problem:
        say(f"the window cannot start ({problem}); install PySide6-Essentials and pyqtgraph")
        return NO_WINDOW
    return int(app.run(files) or 0)
