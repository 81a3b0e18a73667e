"""Tables that give a start and a step instead of a wavelength column.

Either two scalar columns beside the vector cells of the flux, or the axis keywords in the
header of a table whose only spectral column is the flux.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from .columns import ColumnInfo, role_of, scale_columns
from .table_view import TableView
from .units import wave_unit

_LOG = "log10(Angstrom)"


def with_scale(view: TableView) -> TableView:
    """The view with a wavelength column computed where only a scale is stated."""
    if any(role_of(info) == "wave" for info in view.infos):
        return view
    found = scale_columns(view.infos)
    return view if found is None and not _keyword_scale(view) else (
        _from_columns(view, *found) if found else _from_keywords(view))


def _added(view: TableView, info: ColumnInfo, fetch, words: str) -> TableView:
    size = len(view.infos)
    return replace(view, infos=[*view.infos, info],
                   fetch=lambda i: fetch() if i == size else view.fetch(i),
                   fetch_many=None, notes=(*view.notes, words))


def _cells(view: TableView, flux: int) -> tuple[int, int]:
    return view.rows, int(np.asarray(view.fetch(flux)).size // max(view.rows, 1))


def _from_columns(view: TableView, start: int, step: int, flux: int) -> TableView:
    first, second = view.infos[start], view.infos[step]
    log = first.name.lower().startswith("coeff") or "log" in first.unit.lower()
    unit = first.unit or second.unit or (_LOG if log else "")
    rows, count = _cells(view, flux)

    def wave():
        begin = np.asarray(view.fetch(start), dtype=float).reshape(rows, 1)
        width = np.asarray(view.fetch(step), dtype=float).reshape(rows, 1)
        return begin + width * np.arange(count)

    info = ColumnInfo("wave", _LOG if log else unit, first.ucd, first.utype, first.comment, count)
    return _added(view, info, wave, f"wavelengths computed from {first.name} + {second.name} x "
                  "sample number (first sample at the start)")


def _keyword_scale(view: TableView):
    values = {c.key.upper(): c.value for c in view.cards}

    def number(*keys):
        return next((float(values[k]) for k in keys if isinstance(values.get(k), (int, float))
                     and not isinstance(values.get(k), bool)), None)

    start, step = number("CRVAL1", "COEFF0"), number("CD1_1", "CDELT1", "COEFF1")
    flux = next((i for i, info in enumerate(view.infos) if role_of(info) == "flux"), None)
    unit = str(values.get("CUNIT1", "") or "")
    if start is None or not step or flux is None or (unit and wave_unit(unit) is None):
        return None
    log = "CRVAL1" not in values
    return start, step, number("CRPIX1") or 1.0, flux, _LOG if log else unit


def _from_keywords(view: TableView) -> TableView:
    start, step, reference, flux, unit = _keyword_scale(view)
    vector = view.infos[flux].length > 1
    rows, count = _cells(view, flux) if vector else (1, view.rows)
    axis = start + step * (np.arange(1, count + 1) - reference)
    info = ColumnInfo("wave", unit, length=count if vector else 1)
    return _added(view, info, lambda: np.tile(axis, (rows, 1)) if vector else axis,
                  "wavelengths computed from the axis keywords of the table's header")
