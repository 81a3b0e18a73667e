"""Tables of measured features (.ecsv, .csv, .txt) as a FeatureTable.

The columns are named in a header row: ``wave`` (Angstrom) is needed; ``wave_err``,
``depth`` (negative in emission), ``fwhm``, ``kind`` and the Ledger's other measured columns
are used where present, any others ignored. Empty cells are 'not measured'.
"""

from __future__ import annotations

import csv
import math
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from ..errors import InputRefused
from ..measure.features import FeatureTable
from ..spectra.medium import from_medium

OPTIONAL = (
    "wave_err", "significance", "depth", "depth_err", "fwhm", "fwhm_err", "ew", "ew_err",
)  # fmt: skip
POSITIVE = ("wave", "wave_err", "fwhm")
KINDS = {"absorption": 1, "abs": 1, "emission": -1, "em": -1}
EMPTY = ("", "nan", "null", "none", "--", "...")
_SUFFIXES = (".ecsv", ".csv", ".txt", ".dat")
_CURE = "name the columns in a header row: wave and, where known, wave_err, depth, fwhm, kind"


@dataclass(frozen=True)
class _Cells:
    """Text cells by column name; ``lines``: the line of the file each row stands in."""

    columns: dict[str, list[str]]
    lines: list[int]


def read_feature_file(path, medium: str = "air") -> FeatureTable:
    """Features of a table whose ``wave`` is in ``medium`` ('air' or 'vacuum'), Angstrom.

    Numbers count the rows of the file from 1; rows come sorted by wavelength. What the
    table does not say is NaN. Raises InputRefused naming the line of the first bad cell.
    """
    if medium not in ("air", "vacuum"):
        raise InputRefused("--medium", f"'{medium}' is no medium", "use air or vacuum")
    suffix = Path(path).suffix.lower()
    if suffix not in _SUFFIXES:
        raise InputRefused(path, f"no feature table format '{suffix}'", "use .ecsv, .csv or .txt")
    text = _text(path)
    is_ecsv = text.lstrip().startswith("# %ECSV")
    cells = _ecsv_cells(path, text, medium) if is_ecsv else _text_cells(path, text)
    if "wave" not in cells.columns:
        raise InputRefused(path, f"no column 'wave' among {', '.join(cells.columns)}", _CURE)
    if not cells.lines:
        raise InputRefused(path, "no rows", "give at least one feature")
    return _table(path, cells, medium)


def _text(path) -> str:
    try:
        return Path(path).read_text(encoding="utf-8-sig")
    except UnicodeDecodeError:
        raise InputRefused(path, "not UTF-8 text", "save the table as plain text") from None
    except OSError as problem:
        raise InputRefused(path, f"cannot be read ({problem.strerror})", "check the name") from None


def _text_cells(path, text: str) -> _Cells:
    numbered = [(at, line.strip()) for at, line in enumerate(text.splitlines(), start=1)]
    rows = [(at, line) for at, line in numbered if line and not line.startswith("#")]
    if not rows:
        raise InputRefused(path, "no rows", "give at least one feature")
    split = _split_commas if "," in rows[0][1] else str.split
    names = [name.strip().lower() for name in split(rows[0][1])]
    if any(_is_number(name) for name in names):
        raise InputRefused(path, f"line {rows[0][0]}: numbers where names are due", _CURE)
    if len(set(names)) != len(names):
        raise InputRefused(path, "a column name is repeated", _CURE)
    columns: dict[str, list[str]] = {name: [] for name in names}
    for at, line in rows[1:]:
        values = split(line)
        if len(values) != len(names):
            cause = f"line {at}: {len(values)} cells for {len(names)} columns"
            raise InputRefused(path, cause, "write nan for what is not known")
        for name, value in zip(names, values, strict=True):
            columns[name].append(value.strip())
    return _Cells(columns, [at for at, _ in rows[1:]])


def _split_commas(line: str) -> list[str]:
    return next(csv.reader([line], skipinitialspace=True))


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def _ecsv_cells(path, text: str, medium: str) -> _Cells:
    from astropy.table import Table

    try:
        table = Table.read(text, format="ascii.ecsv")
    except Exception as problem:  # astropy raises many kinds on a damaged file
        words = " ".join(str(problem).split())[:120]
        raise InputRefused(path, f"damaged ECSV ({words})", "save the table again") from None
    stated = table.meta.get("medium", medium)
    if stated in ("air", "vacuum") and stated != medium:
        raise InputRefused(path, f"its wavelengths are {stated}", f"give --medium {stated}")
    columns = {name.lower(): _ecsv_column(path, table, name) for name in table.colnames}
    first = next(
        at for at, line in enumerate(text.splitlines(), start=1) if not line.startswith("#")
    )
    return _Cells(columns, list(range(first + 1, first + 1 + len(table))))


def _ecsv_column(path, table, name: str) -> list[str]:
    column = table[name]
    if name.lower() in ("wave", "wave_err", "fwhm", "fwhm_err") and column.unit is not None:
        try:
            column = np.ma.asarray(column) * column.unit.to("Angstrom")
        except Exception:  # not a length
            raise InputRefused(
                path, f"column '{name}' is in {column.unit}", "give it in Angstrom"
            ) from None
    masked = np.ma.getmaskarray(column)
    return ["" if gone else str(value) for value, gone in zip(column, masked, strict=True)]


def _table(path, cells: _Cells, medium: str) -> FeatureTable:
    values = {"wave": _numbers(path, cells, "wave", needed=True)}
    values |= {name: _numbers(path, cells, name) for name in OPTIONAL}
    sign = _signs(path, cells, values["depth"])
    count = len(cells.lines)
    zeros = np.zeros(count, dtype=np.int64)
    own = values.pop("wave")
    table = FeatureTable(
        number=np.arange(1, count + 1),
        segment=zeros,
        component=zeros,
        sign=sign,
        wave=from_medium(own, medium),
        continuum=np.full(count, math.nan),
        flags=("",) * count,
        **values,
    )
    return table.take(np.argsort(table.wave, kind="stable"))


def _numbers(path, cells: _Cells, name: str, needed: bool = False) -> np.ndarray:
    texts = cells.columns.get(name, [""] * len(cells.lines))
    return np.array(
        [
            _number(path, f"line {at}: {name}", text, needed)
            for at, text in zip(cells.lines, texts, strict=True)
        ],
        dtype=float,
    )


def _number(path, where: str, text: str, needed: bool) -> float:
    if text.lower() in EMPTY:
        if needed:
            raise InputRefused(path, f"{where} is empty", "give every feature a wavelength")
        return math.nan
    try:
        value = float(text)
    except ValueError:
        raise InputRefused(path, f"{where} is no number: '{text}'", "mend the cell") from None
    positive = where.rsplit(" ", 1)[1] in POSITIVE
    if not math.isfinite(value) or (positive and value <= 0):
        rule = "must be above zero" if positive else "must be finite"
        raise InputRefused(path, f"{where} is {text}", rule)
    return value


def _signs(path, cells: _Cells, depth: np.ndarray) -> np.ndarray:
    """+1 absorption, -1 emission: by kind, else by the depth's sign, else absorption."""
    signs = np.where(depth < 0, -1, 1)
    kinds = cells.columns.get("kind")
    if kinds is None:
        return signs
    for row, (at, text) in enumerate(zip(cells.lines, kinds, strict=True)):
        kind = text.lower()
        if kind in EMPTY:
            continue
        if kind not in KINDS:
            cause = f"line {at}: no kind '{text}'"
            raise InputRefused(path, cause, "use absorption or emission")
        if depth[row] * KINDS[kind] < 0:
            cause = f"line {at}: {text} with depth {depth[row]:g}"
            raise InputRefused(path, cause, "depth is negative in emission")
        signs[row] = KINDS[kind]
    return signs
