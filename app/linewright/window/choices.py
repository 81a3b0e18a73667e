"""Solve choices: what may be said before a solve; everything empty is found by itself."""

from __future__ import annotations

from dataclasses import replace

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFormLayout, QHBoxLayout, QLabel, QLineEdit, QPushButton, QWidget

from ..errors import InputRefused, LinewrightError
from ..job.options import SolveOptions
from ..lines.species import parse_species_list

FIELDS = (
    ("velocity", "Velocity (km/s)", "found by itself", "Hold this velocity instead of finding it"),
    ("velocity_range", "Velocity range (km/s)", "-500:500", "Where the velocity is looked for"),
    ("temperature", "Temperature (K)", "found by itself", "Excitation temperature"),
    ("log_pe", "log electron pressure", "found by itself", "log10 of dyn cm⁻²"),
    ("metallicity", "[M/H] (dex)", "0.0", "Metallicity against the Sun"),
    ("resolution", "Resolving power", "measured", "λ/Δλ of the instrument"),
    ("vsini", "v sin i (km/s)", "none", "Rotation of the star"),
    ("species", "Only these species", "all", "Separated by commas, such as Fe I, Ti II"),
)


def parsed(texts: dict[str, str], old: SolveOptions) -> SolveOptions:
    """Options of the typed texts; InputRefused names the field that makes no sense."""
    values: dict = {}
    for name, title, _hint, _tip in FIELDS:
        text = texts.get(name, "").strip().replace("−", "-")
        values[name] = _value(name, title, text)
    return replace(old, **values)


def _value(name: str, title: str, text: str):
    if name == "species":
        return parse_species_list(text) if text else ()
    if name == "velocity_range":
        return _range(title, text) if text else SolveOptions.velocity_range
    if not text:
        return 0.0 if name == "metallicity" else None
    number = _number(title, text)
    if name in ("temperature", "resolution") and number <= 0:
        raise InputRefused(title, f"{text} is not above zero", "give a positive number")
    return number


def _number(title: str, text: str) -> float:
    try:
        return float(text.replace(",", "."))
    except ValueError:
        raise InputRefused(title, f"'{text}' is no number", "leave it empty or give one") from None


def _range(title: str, text: str) -> tuple[float, float]:
    low, colon, high = text.partition(":")
    if not colon:
        raise InputRefused(title, f"'{text}' is no range", "write it as -500:500")
    ends = sorted((_number(title, low), _number(title, high)))
    if ends[0] == ends[1]:
        raise InputRefused(title, "both ends are the same", "write it as -500:500")
    return ends[0], ends[1]


def shown(options: SolveOptions) -> dict[str, str]:
    """The texts of options; defaults are left empty."""
    texts = {}
    for name, *_rest in FIELDS:
        value = getattr(options, name)
        if value is None or value == getattr(SolveOptions, name):
            texts[name] = ""
        elif name == "velocity_range":
            texts[name] = f"{value[0]:g}:{value[1]:g}"
        else:
            texts[name] = ", ".join(value) if name == "species" else f"{value:g}"
    return texts


class ChoicesPanel(QWidget):
    """A small window beside the work; 'Solve with these' starts."""

    def __init__(self, bench, parent):
        super().__init__(parent, Qt.WindowType.Tool)
        self.setWindowTitle("Solve choices")
        self._bench = bench
        self.edits: dict[str, QLineEdit] = {}
        form = QFormLayout(self)
        for name, title, hint, tip in FIELDS:
            edit = QLineEdit()
            edit.setPlaceholderText(hint)
            edit.setToolTip(tip)
            edit.setAccessibleName(title)
            edit.returnPressed.connect(self.solve)
            form.addRow(title, edit)
            self.edits[name] = edit
        self.trouble = QLabel()
        self.trouble.setObjectName("trouble")
        self.trouble.setWordWrap(True)
        form.addRow(self.trouble)
        row = QHBoxLayout()
        for text, act in (("Clear", self.clear), ("Solve with these", self.solve)):
            button = QPushButton(text)
            button.clicked.connect(act)
            row.addWidget(button)
        form.addRow(row)

    def open(self) -> None:
        for name, text in shown(self._bench.desk.options).items():
            self.edits[name].setText(text)
        self.trouble.hide()
        self.adjustSize()
        over = self.parentWidget()
        middle = over.mapToGlobal(over.rect().center())
        self.move(middle - self.rect().center())
        self.show()
        self.raise_()
        self.activateWindow()

    def clear(self) -> None:
        for edit in self.edits.values():
            edit.clear()

    def solve(self) -> None:
        texts = {name: edit.text() for name, edit in self.edits.items()}
        try:
            self._bench.desk.options = parsed(texts, self._bench.desk.options)
        except LinewrightError as refusal:
            self.trouble.setText(str(refusal))
            self.trouble.show()
            return
        self.hide()
        self._bench.run("spectrum.solve")

    def keyPressEvent(self, event) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.hide()
        else:
            super().keyPressEvent(event)
