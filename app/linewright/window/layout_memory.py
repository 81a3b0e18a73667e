"""Remembers the window's place, its splitters, shown panels and theme between runs."""

from __future__ import annotations

from PySide6.QtCore import QByteArray, QSettings

ORGANISATION, APPLICATION = "Linewright", "Linewright"


def settings() -> QSettings:
    return QSettings(
        QSettings.Format.IniFormat, QSettings.Scope.UserScope, ORGANISATION, APPLICATION)


def keep(name: str, value) -> None:
    settings().setValue(name, value)


def recall(name: str, default=""):
    return settings().value(name, default)


def keep_bytes(name: str, value: QByteArray) -> None:
    settings().setValue(name, value)


def recall_bytes(name: str) -> QByteArray | None:
    value = settings().value(name)
    return value if isinstance(value, QByteArray) and not value.isEmpty() else None


def recall_flag(name: str, default: bool) -> bool:
    return str(recall(name, default)).lower() in ("true", "1")


def recent_files() -> list[str]:
    value = recall("recent", [])
    return [value] if isinstance(value, str) and value else list(value or [])


def add_recent(path: str) -> None:
    kept = [path, *[p for p in recent_files() if p != path]][:8]
    keep("recent", kept)
