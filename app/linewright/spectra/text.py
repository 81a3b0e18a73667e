"""Spectra in plain text: any delimiter, comment mark, header line and column order."""

from __future__ import annotations

import re
import warnings

import numpy as np

from ..errors import InputRefused
from .columns import ColumnInfo, role_of
from .opening import Opened

_COMMENTS = ("#", ";", "!", "%", "//", "\\", "|")
_HEAD_BYTES = 1 << 20
LONGEST_LINE = 20_000  # characters; a longer one is no row of a spectrum
MOST_HEADER_LINES = 5000


def _number(token: str) -> float | None:
    token = token.strip().strip('"')
    if not token or token.lower() in ("-", "--", "null", "none", "indef", "masked"):
        return float("nan")
    try:
        return float(token)
    except ValueError:
        if re.fullmatch(r"[-+]?\d*\.?\d+[dD][-+]?\d+", token):
            return float(token.lower().replace("d", "e"))
        return None


def _delimiter(line: str) -> str | None:
    for mark in ("\t", ",", ";"):
        if mark in line.strip():
            return mark
    return None


def _split(line: str, delimiter: str | None) -> list[str]:
    return [t.strip().strip('"') for t in line.strip().split(delimiter)]


def _is_data(tokens: list[str]) -> bool:
    values = [_number(t) for t in tokens]
    return len(values) >= 2 and None not in values and any(np.isfinite(values))


class Layout:
    """What the first lines tell: lines to skip, delimiter, column names, comments."""

    def __init__(self, lines: list[str], what):
        self.comments: list[str] = []
        self.skip, self.names, self.delimiter = None, [], None
        header = ""
        for index, line in enumerate(lines):
            bare = line.strip()
            if not bare:
                continue
            if bare.startswith(_COMMENTS):
                self.comments.append(bare.lstrip("#;!%/\\| "))
                continue
            delimiter = _delimiter(bare)
            if len(bare) <= LONGEST_LINE and _is_data(_split(bare, delimiter)):
                self.skip, self.delimiter = index, delimiter
                self.width = len(_split(bare, delimiter))
                break
            header = bare
            self.comments.append(bare)
            if len(bare) > LONGEST_LINE or len(self.comments) > MOST_HEADER_LINES:
                break
        if self.skip is None:
            raise InputRefused(what, "is text without rows of numbers",
                               "a spectrum needs a wavelength and a flux in each row")
        self._name(header)

    def _name(self, header: str) -> None:
        """A header line names the columns; a comment does when it names wave and flux."""
        for line in (header, *reversed(self.comments)):
            for delimiter in (self.delimiter, None, ",", "|"):
                names = [n for n in _split(line, delimiter) if n]
                wordy = all(re.match(r"^[A-Za-zÅλµμ]", n) for n in names)
                if len(names) == self.width and wordy and (line is header or _telling(names)):
                    self.names = names
                    return


def _telling(names: list[str]) -> bool:
    return {"wave", "flux"} <= {role_of(ColumnInfo(name)) for name in names}


def _decoded(opened: Opened) -> str:
    with opened.stream() as handle:
        data = handle.read()
    for code in ("utf-8-sig", "latin-1"):
        try:
            return data.decode(code)
        except UnicodeDecodeError:
            continue
    raise InputRefused(opened.path, "is not text", "save the spectrum as FITS or text")


def _fast(opened: Opened, layout: Layout) -> np.ndarray | None:
    marks = [mark for mark in _COMMENTS[:4] if mark != layout.delimiter]
    try:
        with opened.stream() as handle, warnings.catch_warnings():
            warnings.simplefilter("ignore")
            return np.loadtxt(handle, skiprows=layout.skip, ndmin=2,
                              delimiter=layout.delimiter, comments=marks)
    except (ValueError, TypeError, IndexError, UnicodeDecodeError):
        return None


def _tolerant(lines: list[str], layout: Layout) -> tuple[np.ndarray, int]:
    """(rows, number of lines left out): lines of another width or with words are left out."""
    rows, skipped = [], 0
    for line in lines[layout.skip:]:
        bare = line.strip()
        if not bare or bare.startswith(_COMMENTS):
            continue
        values = [_number(t) for t in _split(bare, layout.delimiter)]
        if len(values) != layout.width or None in values:
            skipped += 1
            if skipped > 500 and 4 * skipped > len(rows):
                break
            continue
        rows.append(values)
    return np.array(rows, dtype=float).reshape(len(rows), layout.width), skipped


def _without_names(data: np.ndarray) -> tuple[list[ColumnInfo], list[str]]:
    """Names for nameless columns: wave, flux and a third column that looks like errors."""
    names, notes = ["wave", "flux"] + [""] * (data.shape[1] - 2), []
    if data.shape[1] >= 3:
        flux, third = data[:, 1], data[:, 2]
        with np.errstate(invalid="ignore"):
            positive = np.nanmin(third) >= 0 if np.isfinite(third).any() else False
            small = np.nanmedian(third) < 0.5 * np.nanmedian(np.abs(flux))
        if positive and small and np.nanmedian(third) > 0:
            names[2] = "err"
            notes.append("third column taken as the error of the flux (no header says so)")
    return [ColumnInfo(n) for n in names], notes


def read_table(opened: Opened):
    """(data, shape (rows, columns); ColumnInfo list; comment lines; notes).

    Raises InputRefused for text without rows of numbers.
    """
    with opened.stream() as handle:
        head = handle.read(_HEAD_BYTES).decode("latin-1")
    layout = Layout(head.lstrip("\ufeff").splitlines(), opened.path)
    data, skipped, notes = _fast(opened, layout), 0, []
    if data is None or data.shape[1] != layout.width:
        data, skipped = _tolerant(_decoded(opened).splitlines(), layout)
    if skipped > max(10, len(data)) or (skipped > 500 and 4 * skipped > len(data)):
        raise InputRefused(opened.path, f"{skipped} or more of its lines are no rows of numbers",
                           "a spectrum needs a wavelength and a flux in each row")
    if skipped:
        notes.append(f"{skipped} lines that are no rows of {layout.width} numbers left out")
    if layout.names:
        infos = [ColumnInfo(name) for name in layout.names]
    else:
        infos, more = _without_names(data)
        notes += more
    return data, infos, layout.comments, notes
