"""Binary tables of FITS files as views whose plain columns are read without detours.

Columns of plain numbers are copied out of the file in blocks of rows, all those wanted in
one pass, so that memory holds the arrays and one block. Scaled columns, variable lengths and
text tables go through astropy.
"""

from __future__ import annotations

import numpy as np

from .columns import ColumnInfo
from .opening import Opened
from .table_view import TableView

BLOCK = 1 << 20  # bytes read at a time
_PLAIN = ("B", "I", "J", "K", "E", "D")


def _code(column) -> str:
    return str(column.format).lstrip("0123456789")[:1]


def _is_plain(column) -> bool:
    return (_code(column) in _PLAIN and column.bscale in (None, "", 1)
            and column.bzero in (None, "", 0) and column.null is None)


def _lengths(hdu) -> list[int]:
    """Samples per cell of each column, 2 where they vary."""
    lengths = []
    for column in hdu.columns:
        count = "".join(c for c in str(column.format) if c.isdigit() or c in "PQ")
        if _code(column) in ("P", "Q"):
            lengths.append(2)
        else:
            digits = count.split("P")[0].split("Q")[0]
            lengths.append(int(digits) if digits and _code(column) != "A" else 1)
    return lengths


def column_infos(hdu) -> list[ColumnInfo]:
    """What the header of a table HDU says of each column; no data are read."""
    header, infos = hdu.header, []
    text = hdu.header.get("XTENSION", "").strip() == "TABLE"
    lengths = [1] * len(hdu.columns) if text else _lengths(hdu)
    for number, (column, length) in enumerate(zip(hdu.columns, lengths), start=1):
        numeric = _code(column) in (*_PLAIN, "L", "X", "P", "Q", "F") if not text else (
            str(column.format)[:1] in ("I", "F", "E", "D"))
        infos.append(ColumnInfo(
            column.name, str(column.unit or ""), str(header.get(f"TUCD{number}", "")),
            str(header.get(f"TUTYP{number}", "")), str(header.comments[f"TTYPE{number}"]),
            length, numeric))
    return infos


class FitsColumns:
    """Fetches columns of one table HDU by index; shapes (rows,) or (rows, cell)."""

    def __init__(self, hdu, opened: Opened):
        self.hdu, self.opened = hdu, opened
        self.rows = int(hdu.header["NAXIS2"])
        self.width = int(hdu.header["NAXIS1"])
        self.start = int(hdu.fileinfo()["datLoc"])

    def __call__(self, index: int) -> np.ndarray:
        return self.many([index])[0]

    def many(self, indices) -> list[np.ndarray]:
        """Those columns, native numbers, in one pass where all are plain."""
        columns = [self.hdu.columns[i] for i in indices]
        if not all(_is_plain(c) for c in columns) or self.hdu.columns.dtype.itemsize != self.width:
            return [np.asarray(self.hdu.data.field(i)) for i in indices]
        dtype = self.hdu.columns.dtype.newbyteorder(">")
        names = [dtype.names[i] for i in indices]
        arrays = [np.empty((self.rows, *dtype[name].shape),
                           dtype[name].base.newbyteorder("=")) for name in names]
        step = max(1, BLOCK // max(self.width, 1))
        buffer = bytearray(step * self.width)
        block = np.frombuffer(buffer, dtype)
        with self.opened.stream() as stream:
            stream.seek(self.start)
            for first in range(0, self.rows, step):
                count = min(step, self.rows - first)
                if stream.readinto(memoryview(buffer)[:count * self.width]) < count * self.width:
                    raise EOFError(f"the table ends at row {first} of {self.rows}")
                for array, name in zip(arrays, names):
                    array[first:first + count] = block[name][:count]
        return arrays


def table_view(hdus, index: int, opened: Opened, cards) -> TableView:
    """The table HDU ``index``; cards: header statements that speak about it."""
    hdu = hdus[index]
    header, infos, fetch = hdu.header, column_infos(hdu), FitsColumns(hdu, opened)
    name = f" '{hdu.name}'" if hdu.name else ""
    model = str(header.get("VOCLASS", "") or hdus[0].header.get("VOCLASS", "")).upper()
    utypes = any("spectralaxis" in info.utype.lower() for info in infos)
    return TableView(
        f"FITS table, HDU {index}{name}", infos, fetch.rows, fetch, cards,
        str(header.get("BUNIT", "") or hdus[0].header.get("BUNIT", "")),
        iv_spectrum="SPECTRUM" in model or utypes, fetch_many=fetch.many)
