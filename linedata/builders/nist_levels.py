"""Energy levels of the NIST Atomic Spectra Database, read from the copies in pyneb 1.1.32.

The files hold blocks 'configuration | term | J | level (cm-1) | reference'; blank
configuration and term repeat those above.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from common import source_file
from levels_beyond import LEAST_ERROR, beyond

# Error of a level in units of its last printed digit: rounding (0.29) and a little more.
ROUNDING = 0.35
ROMAN = "i ii iii iv v vi vii viii".split()


@dataclass(frozen=True)
class Levels:
    """Levels of one ion: energy and its error (cm-1), J (NaN unknown), parity, names."""

    energy: np.ndarray
    error: np.ndarray
    j: np.ndarray
    odd: np.ndarray
    configuration: np.ndarray
    term: np.ndarray

    def __len__(self) -> int:
        return len(self.energy)

    def label(self, row: int) -> str:
        """'configuration|term' of one level."""
        return f"{self.configuration[row]}|{self.term[row]}"


def _energy(text: str) -> tuple[float, float] | None:
    """Level and error from the printed digits; None for values relative to an unknown zero."""
    if re.search(r"[+][a-z]|[+]$", text):
        return None
    match = re.search(r"\d+(\.\d*)?", text)
    if not match:
        return None
    digits = len(match[0].partition(".")[2])
    bracketed = "[" in text or "(" in text or "?" in text
    return float(match[0]), (3.0 if bracketed else ROUNDING) * 10.0**-digits


def _spin(text: str) -> float:
    """J of '9/2' or '4'; NaN for blanks and alternatives."""
    match = re.fullmatch(r"\s*(\d+)(/2)?\s*", text)
    return float("nan") if not match else int(match[1]) / (2.0 if match[2] else 1.0)


def read_levels(source: Path, element: str, stage: int) -> Levels | None:
    """Levels below the first ionisation limit; None where no file exists."""
    name = f"{element.lower()}_{ROMAN[stage - 1]}_levels.dat"
    try:
        path = source_file(source, f"pyneb*/pyneb/atomic_data/levels/{name}")
    except FileNotFoundError:
        return None
    rows, configuration, term = [], "", ""
    for line in path.read_text(errors="replace").splitlines():
        cells = [cell.strip() for cell in line.split("|")]
        if len(cells) == 7:
            cells = [*cells[:4], cells[6]]
        if len(cells) != 5:
            continue
        if "limit" in line.lower():
            break
        configuration, term = cells[0] or configuration, cells[1] or term
        if cells[0] and not cells[1]:
            term = ""
        level = _energy(cells[3])
        if level is not None:
            rows.append((*level, _spin(cells[2]), "*" in term, configuration, term))
    if not rows:
        return None
    top = max(row[0] for row in rows)
    for configuration, term, j, text in beyond(element, stage):
        energy, error = _energy(text)
        if energy > top or element == "O":
            error = max(error, LEAST_ERROR.get((element, stage), 0.0))
            rows.append((energy, error, _spin(j), "*" in term, configuration, term))
    energy, error, j, odd, conf, terms = zip(*rows, strict=True)
    return Levels(
        np.array(energy), np.array(error), np.array(j), np.array(odd), np.array(conf),
        np.array(terms),
    )
