"""How a user's line table is laid out: columns, units, medium, citation; reading it as text cells."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from ..errors import InputRefused

REQUIRED = ("species", "wave")
OPTIONAL = ("wave_err", "e_low", "loggf", "loggf_err", "emission", "spread", "j_low", "j_up")
CURE = "give a CSV, ECSV, VOTable or fixed-width table with the columns species and wave"
# Factors to Angstrom; wave numbers (cm-1) are turned over.
LENGTHS = {"angstrom": 1.0, "aa": 1.0, "a": 1.0, "0.1nm": 1.0, "nm": 10.0, "um": 1e4, "micron": 1e4}
WAVENUMBERS = ("cm-1", "1/cm", "1 / cm", "kayser")
ENERGIES = {"ev": 1.0, "cm-1": 1.0 / 8065.543937, "1/cm": 1.0 / 8065.543937, "1 / cm": 1.0 / 8065.543937}


@dataclass(frozen=True)
class Layout:
    """What a file does not say itself.

    columns: our name -> the file's column name, or for fixed-width text (first, last) character
        positions counted from 1; names not given are looked for as they are
    units: our name -> unit ('nm', 'um', 'Angstrom', 'cm-1' for wave; 'eV', 'cm-1' for e_low)
    citation: source of the lines, kept with every line
    header_lines: lines skipped at the head of fixed-width text
    """

    columns: dict[str, str | tuple[int, int]] = field(default_factory=dict)
    units: dict[str, str] = field(default_factory=dict)
    citation: str = ""
    header_lines: int = 0

    @property
    def fixed_width(self) -> bool:
        return any(isinstance(where, tuple) for where in self.columns.values())


@dataclass(frozen=True)
class Cells:
    """A table as read: columns of cells by our names, units and metadata of the file.

    numbers: the row number of each row, counted from 1 at the first data row
    """

    columns: dict[str, list]
    units: dict[str, str]
    meta: dict[str, str]
    numbers: list[int]

    def __len__(self) -> int:
        return len(self.numbers)

    def given(self, name: str) -> np.ndarray:
        """Where a column holds anything at all."""
        if name not in self.columns:
            return np.zeros(len(self), bool)
        return np.array([c is not None and str(c).strip() != "" for c in self.columns[name]], bool)

    def numeric(self, name: str) -> np.ndarray:
        """A column as floats; NaN where missing, masked or no number."""
        values = np.full(len(self), np.nan)
        for k, cell in enumerate(self.columns.get(name, ())):
            try:
                values[k] = np.nan if cell is None else float(cell)
            except (TypeError, ValueError):
                continue
        return values


def read_cells(path: Path, layout: Layout) -> Cells:
    """The cells of a table file by suffix (.ecsv, .csv, .vot, .xml, .votable) or fixed width.

    Raises InputRefused for a missing or unreadable file and for a missing required column.
    """
    if not path.is_file():
        raise InputRefused(path, "no such file", CURE)
    cells = _fixed_width(path, layout) if layout.fixed_width else _tabular(path, layout)
    missing = [name for name in REQUIRED if name not in cells.columns]
    if missing:
        raise InputRefused(path, f"the column {missing[0]} is missing", CURE)
    return cells


def _fixed_width(path: Path, layout: Layout) -> Cells:
    spans = {name: where for name, where in layout.columns.items() if isinstance(where, tuple)}
    for name, (first, last) in spans.items():
        if not 1 <= first <= last:
            raise InputRefused(path, f"{name}: no such characters {first}-{last}", "count from 1")
    try:
        lines = path.read_text(encoding="utf-8").splitlines()[layout.header_lines:]
    except (OSError, UnicodeDecodeError) as error:
        raise InputRefused(path, f"not a text file ({error})", CURE) from None
    kept = [(k + 1, text) for k, text in enumerate(lines) if text.strip() and text[0] != "#"]
    columns = {
        name: [text[first - 1:last].strip() for _, text in kept]
        for name, (first, last) in spans.items()
    }
    return Cells(columns, {}, {}, [number for number, _ in kept])


_FORMATS = {".ecsv": "ascii.ecsv", ".vot": "votable", ".xml": "votable", ".votable": "votable"}


def _tabular(path: Path, layout: Layout) -> Cells:
    from astropy.table import Table

    try:
        table = Table.read(path, format=_FORMATS.get(path.suffix.lower(), "ascii.csv"))
    except Exception as error:  # astropy raises many kinds for a malformed table
        reason = str(error).strip().splitlines()
        raise InputRefused(path, f"not a table: {reason[0] if reason else error!r}", CURE) from None
    columns, units = {}, {}
    for name in (*REQUIRED, *OPTIONAL):
        column = _find(table, name, layout)
        if column is not None:
            columns[name] = column.tolist()
            units[name] = str(column.unit or "")
    meta = {str(key): str(value) for key, value in table.meta.items()}
    return Cells(columns, units, meta, list(range(1, len(table) + 1)))


def _find(table, name: str, layout: Layout):
    """The column of a quantity: as mapped, as named, or (wave) by its UCD; None without one."""
    mapped = layout.columns.get(name, name)
    if mapped in table.colnames:
        return table[mapped]
    if name in layout.columns:
        raise InputRefused(mapped, "no such column", f"columns: {', '.join(table.colnames)}")
    if name == "wave":
        for column in table.columns.values():
            if str((column.info.meta or {}).get("ucd", "")).startswith("em.wl"):
                return column
    return None


def in_angstrom(values: np.ndarray, unit: str) -> np.ndarray:
    """Wavelengths (or wavenumbers) of a unit in Angstrom; InputRefused for other units."""
    spelled = (unit or "Angstrom").strip().lower()
    if spelled in WAVENUMBERS:
        with np.errstate(divide="ignore"):
            return 1e8 / values
    if spelled not in LENGTHS:
        raise InputRefused(f"unit '{unit}'", "no wavelength", "one of Angstrom, nm, um, cm-1")
    return values * LENGTHS[spelled]


def in_ev(values: np.ndarray, unit: str) -> np.ndarray:
    """Energies of a unit in eV; InputRefused for other units."""
    spelled = (unit or "eV").strip().lower()
    if spelled not in ENERGIES:
        raise InputRefused(f"unit '{unit}'", "no energy", "one of eV, cm-1")
    return values * ENERGIES[spelled]
