"""Unexpected exceptions: a log file and a notice instead of a lost window."""

from __future__ import annotations

import sys
from pathlib import Path


def log_path() -> Path:
    from PySide6.QtCore import QStandardPaths

    folder = QStandardPaths.writableLocation(QStandardPaths.StandardLocation.AppLocalDataLocation)
    return Path(folder) / "troubles.log"


def log_trouble(error: BaseException) -> Path:
    """Appends the traceback to the log; a log that cannot be written is no second trouble."""
    import traceback
    from datetime import UTC, datetime

    path = log_path()
    text = "".join(traceback.format_exception(error))
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        with open(path, "a", encoding="utf-8") as log:
            log.write(f"{datetime.now(UTC).isoformat(timespec='seconds')}\n{text}\n")
    except OSError:
        sys.stderr.write(text)
    return path


def install_hook(report) -> None:
    """Sends exceptions of slots and events to ``report(error)``."""

    def hook(kind, error, trace) -> None:
        if issubclass(kind, KeyboardInterrupt):
            sys.__excepthook__(kind, error, trace)
            return
        report(error)

    sys.excepthook = hook
