"""Tables written in the format of their suffix, whole or not at all."""

from __future__ import annotations

import io
import warnings
from pathlib import Path

from ..errors import InputRefused
from ..session.atomic import check_writable, write_atomically
from .columns import AGAIN, LEDGER, ORPHANS, ROLL_CALL

PRINTED = {c.name: c.print_format for c in (*LEDGER, *ROLL_CALL, *ORPHANS, *AGAIN) if c.print_format}


def write_table(table, path, force: bool = False) -> None:
    """Write an astropy table as .ecsv, .csv, .tex, .vot or .mrt.

    ECSV, CSV and VOTable keep every digit; .tex and .mrt print rounded numbers. Raises
    InputRefused for another suffix or an existing file (without force).
    """
    check_suffix(path)
    check_writable(path, force)
    if not len(table) and Path(path).suffix.lower() == ".mrt":
        raise InputRefused(path, "the table is empty, which .mrt cannot say", "use .ecsv")
    write_atomically(path, table_bytes(table, Path(path).suffix.lower()), force)


def check_suffix(path) -> None:
    """InputRefused unless the suffix names a table format."""
    if Path(path).suffix.lower() not in _WRITERS:
        raise InputRefused(
            path, f"no table format '{Path(path).suffix}'", f"use {', '.join(_WRITERS)}"
        )


def table_bytes(table, suffix: str) -> bytes:
    """The file's bytes; the same table gives the same bytes."""
    with warnings.catch_warnings():
        # VOUnit deprecates the angstrom, the unit of the trade
        warnings.simplefilter("ignore")
        return _WRITERS[suffix](table)


def _ascii(table, name: str, **options) -> bytes:
    text = io.StringIO()
    table.write(text, format=name, **options)
    return text.getvalue().encode("utf-8")


def _ecsv(table) -> bytes:
    return _ascii(table, "ascii.ecsv")


def _csv(table) -> bytes:
    return _ascii(table, "ascii.csv")


def _tex(table) -> bytes:
    return _ascii(_texted(_rounded(table)), "ascii.latex", latexdict={"tabletype": "table*"})


def _vot(table) -> bytes:
    data = io.BytesIO()
    plain = table.copy()
    plain.meta = {key: str(value) for key, value in table.meta.items()}
    plain.write(data, format="votable")
    return data.getvalue()


def _mrt(table) -> bytes:
    copy = _rounded(table)
    for name in copy.colnames:
        if str(copy[name].unit) == "dex":
            # the CDS units know no dex
            copy[name].unit = None
    return _ascii(copy, "ascii.mrt")


_WRITERS = {".ecsv": _ecsv, ".csv": _csv, ".tex": _tex, ".vot": _vot, ".mrt": _mrt}
SUFFIXES = tuple(_WRITERS)


def _rounded(table):
    """A copy with print formats; columns nothing is known of are left out."""
    copy = table.copy()
    for name in list(copy.colnames):
        column = copy[name]
        if len(copy) and all(column.mask):
            copy.remove_column(name)
        elif name in PRINTED:
            column.info.format = PRINTED[name]
    return copy


_SPECIAL = {
    "_": r"\_",
    "%": r"\%",
    "&": r"\&",
    "#": r"\#",
    "$": r"\$",
    "\\": r"\textbackslash{}",
}


def _texted(table):
    for name in table.colnames:
        if table[name].dtype.kind == "U":
            escaped = [
                "".join(_SPECIAL.get(ch, ch) for ch in str(v)) for v in table[name].filled("")
            ]
            table[name] = escaped
    table.rename_columns(table.colnames, [name.replace("_", r"\_") for name in table.colnames])
    return table
