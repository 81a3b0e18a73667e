"""ECSV and VOTable spectra, through astropy's readers."""

from __future__ import annotations

import warnings

import numpy as np

from ..errors import InputRefused
from .columns import ColumnInfo
from .opening import Opened
from .raw import Card
from .tables import TableView


def is_ecsv(opened: Opened) -> bool:
    """True when the first line says ECSV."""
    with opened.stream() as handle:
        return b"%ECSV" in handle.read(64)


def _meta_cards(meta) -> list[Card]:
    cards = []
    for key, value in dict(meta or {}).items():
        if isinstance(value, dict):
            cards += _meta_cards(value)
        elif isinstance(value, (list, tuple)):
            cards += [Card("COMMENT" if str(key).startswith("comment") else str(key), str(v))
                      for v in value]
        else:
            cards.append(Card("COMMENT" if str(key).startswith(("comment", "description"))
                              else str(key), value))
    return cards


def _column_info(column) -> ColumnInfo:
    meta = dict(getattr(column, "meta", None) or {})
    return ColumnInfo(
        column.name, str(column.unit or ""), str(meta.get("ucd", "")),
        str(meta.get("utype", "")), str(column.description or ""),
        int(np.prod(column.shape[1:], dtype=int)) if column.ndim > 1 else 1,
        column.dtype.kind in "biuf",
    )


def _filled(column) -> np.ndarray:
    data = column.filled(np.nan) if hasattr(column, "filled") and column.dtype.kind == "f" else (
        np.ma.filled(column, 0) if np.ma.isMaskedArray(column) else column)
    return np.asarray(data)


def _name(meta) -> str:
    for key in ("OBJECT", "object", "target", "TARGET"):
        if key in (meta or {}):
            return str(meta[key])
    return ""


def _view(table, where: str, extra_cards=(), iv_spectrum: bool = False) -> TableView:
    infos = [_column_info(table.columns[n]) for n in table.colnames]
    cards = tuple(_meta_cards(table.meta)) + tuple(extra_cards)
    return TableView(where, infos, len(table), lambda i: _filled(table.columns[i]), cards,
                     name=_name(table.meta), iv_spectrum=iv_spectrum)


def read_ecsv(opened: Opened) -> TableView:
    """The table of an ECSV file. Raises InputRefused when astropy cannot read it."""
    from astropy.table import Table

    with opened.stream() as handle, warnings.catch_warnings():
        warnings.simplefilter("ignore")
        text = handle.read().decode("utf-8")
        table = Table.read(text.splitlines(), format="ascii.ecsv")
    return _view(table, "ECSV table")


def _refuse_entities(opened: Opened) -> None:
    """Entities are declared before the root element, however much is put before them."""
    with opened.stream() as handle:
        kept = b""
        while chunk := handle.read(1 << 20):
            text = (kept + chunk).upper()
            if b"<!ENTITY" in text:
                raise InputRefused(opened.path, "XML with entity declarations is not opened",
                                   "save it as a plain VOTable")
            if b"<VOTABLE" in text or b"<VOT:VOTABLE" in text:
                return
            kept = chunk[-16:]


def read_votable(opened: Opened, table_number: int | None) -> list[TableView]:
    """Every table of a VOTable (or the one numbered from 1) as views."""
    from astropy.io import votable

    _refuse_entities(opened)
    with opened.stream() as handle, warnings.catch_warnings():
        warnings.simplefilter("ignore")
        document = votable.parse(handle, verify="ignore")
    views = []
    for number, element in enumerate(document.iter_tables(), start=1):
        if table_number is not None and number != table_number:
            continue
        table = element.to_table(use_names_over_ids=True)
        utypes = [str(f.utype or "") for f in element.fields]
        model = any("spec" in u.lower() for u in (*utypes, str(element.utype or "")))
        for name, field in zip(table.colnames, element.fields):
            table.columns[name].meta.update(ucd=field.ucd or "", utype=field.utype or "")
        cards = [Card(p.name or "", p.value, str(p.description or ""))
                 for p in element.params]
        views.append(_view(table, f"VOTable, table {number}", cards, model))
    return views
