"""The welcome page: how to begin, and the sample spectra."""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path

from PySide6.QtCore import Signal
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from ..errors import LinewrightError
from ..resources import samples_dir


@dataclass(frozen=True)
class Sample:
    """One sample spectrum with its one-line description."""

    path: Path
    title: str
    description: str
    medium: str


def samples() -> list[Sample]:
    """The shipped samples; none when the folder or its list is not there."""
    try:
        folder = samples_dir()
        listed = json.loads((folder / "samples.json").read_text("utf-8"))
    except (LinewrightError, OSError, ValueError):
        return []
    found = [Sample(folder / s["file"], *(str(s.get(k, "")) for k in (
                 "title", "description", "medium")))
             for s in listed if isinstance(s, dict) and "file" in s]
    return [s for s in found if s.path.is_file()]


class WelcomePage(QWidget):
    """``opened`` with a path, ``asked`` for the file dialog."""

    opened = Signal(str)
    asked = Signal()

    def __init__(self, parent=None):
        super().__init__(parent)
        self.setObjectName("welcome")
        self.setAccessibleName("Welcome")
        self.buttons: list[QPushButton] = []
        inside = QWidget()
        box = QVBoxLayout(inside)
        box.setContentsMargins(0, 24, 0, 24)
        box.setSpacing(10)
        title = QLabel("Linewright")
        title.setObjectName("title")
        box.addStretch(1)
        box.addWidget(title)
        box.addWidget(_quiet("Which species made which line of a stellar or nebular spectrum, at "
                             "what velocity, and how sure is that?"))
        box.addLayout(self._opening())
        self._samples(box)
        box.addStretch(2)
        _centre(self, inside)

    def _opening(self) -> QHBoxLayout:
        row = QHBoxLayout()
        button = QPushButton("Open a spectrum or session…")
        button.setObjectName("primary")
        button.setToolTip("FITS, VOTable, ECSV, text or a saved session (Ctrl+O)")
        button.clicked.connect(self.asked)
        row.addWidget(button)
        row.addWidget(_quiet("or drop a file anywhere on this window"), 1)
        return row

    def _samples(self, box: QVBoxLayout) -> None:
        known = samples()
        heading = QLabel("Try a sample" if known else "Samples are not installed")
        heading.setObjectName("heading")
        box.addSpacing(8)
        box.addWidget(heading)
        column = QVBoxLayout()
        column.setSpacing(4)
        for sample in known:
            button = QPushButton(f"{sample.title}\n{sample.description}")
            button.setObjectName("sample")
            button.setToolTip(f"{sample.path.name} · wavelengths in {sample.medium}")
            button.clicked.connect(lambda _checked, p=sample.path: self.opened.emit(str(p)))
            self.buttons.append(button)
            column.addWidget(button)
        box.addLayout(column)
        box.addSpacing(8)
        box.addWidget(_quiet("Then F5 solves, a click on a feature explains it, Ctrl+S saves. "
                             "Ctrl+Shift+P finds any command, F1 explains all of them."))


def _quiet(text: str) -> QLabel:
    label = QLabel(text)
    label.setObjectName("quiet")
    label.setWordWrap(True)
    return label


def _centre(page: QWidget, inside: QWidget) -> None:
    inside.setMaximumWidth(760)
    area = QScrollArea()
    area.setFrameShape(QFrame.Shape.NoFrame)
    area.setWidgetResizable(True)
    holder = QWidget()
    row = QHBoxLayout(holder)
    row.addStretch(1)
    row.addWidget(inside, 8)
    row.addStretch(1)
    area.setWidget(holder)
    box = QVBoxLayout(page)
    box.setContentsMargins(24, 0, 24, 0)
    box.addWidget(area)
