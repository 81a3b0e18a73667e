"""A spectrum out of a table, whatever file it came from."""

from __future__ import annotations

import re

import numpy as np

from ..errors import InputRefused
from .columns import Roles, choose, column_unit
from .raw import Card, Raw, RawSegment, Wanted
from .scales import with_scale
from .table_view import TableView
from .uncertainty import mask_from_flags, sigma_from_ivar
from .units import WaveUnit, guess_unit

_ORDER_NAME = re.compile(r"^(?:sporder|order|orders|segment|detector|chip|arm|spec_?order)$",
                         re.IGNORECASE)


def _rows_wanted(view: TableView, wanted: Wanted, what) -> tuple[list[int], str]:
    """Rows of vector cells to read, and what to say about the choice."""
    if wanted.row is not None:
        if not 1 <= wanted.row <= view.rows:
            raise InputRefused(what, f"has no row {wanted.row} (rows 1 to {view.rows})",
                               "choose with --row")
        return [wanted.row - 1], f", row {wanted.row}"
    if view.rows == 1:
        return [0], ""
    if any(_ORDER_NAME.match(i.name) for i in view.infos):
        return list(range(view.rows)), f", {view.rows} rows as segments"
    return [0], f", row 1 of {view.rows} (choose with --row)"


def _vector_rows(view: TableView, roles: Roles, wanted: Wanted, what):
    chosen, words = _rows_wanted(view, wanted, what)
    indices = (roles.wave, roles.flux, roles.err, roles.ivar, roles.mask)
    columns = view.columns(indices)
    size = columns[1].reshape(view.rows, -1).shape[1]
    picked = []
    for row in chosen:
        cells = [None if c is None else np.ravel(c[row]) for c in columns]
        cells[0] = np.broadcast_to(cells[0], (size,)) if cells[0].size == 1 else cells[0]
        picked.append([None if c is None or c.size != size else c for c in cells])
        if picked[-1][0] is None:
            raise InputRefused(what, "wavelength and flux cells differ in length",
                               "choose other columns with --columns")
    return picked, words


def _samples(view: TableView, roles: Roles, wanted: Wanted, what):
    """([(wave, flux, err, ivar, flags)], words): arrays of shape (n,) per segment."""
    if view.infos[roles.flux].length > 1:
        picked, words = _vector_rows(view, roles, wanted, what)
        return picked, f"vector cells{words}"
    indices = (roles.wave, roles.flux, roles.err, roles.ivar, roles.mask)
    cells = view.columns(indices)
    orders = _long_orders(view)
    if len(orders) < 2:
        return [cells], "a sample a row"
    return [[None if c is None else c[o] for c in cells] for o in orders], (
        f"a sample a row, {len(orders)} segments")


def _long_orders(view: TableView) -> list[np.ndarray]:
    """Rows of each order where a column numbers them, every one of at least 8 samples."""
    at = next((i for i, info in enumerate(view.infos) if _ORDER_NAME.match(info.name)
               and info.numeric and info.length == 1), None)
    if at is None:
        return []
    numbers = np.asarray(view.fetch(at))
    which, inverse, counts = np.unique(numbers, return_inverse=True, return_counts=True)
    if len(which) > 500 or counts.min() < 8:
        return []
    return [np.flatnonzero(inverse == k) for k in range(len(which))]


def _segment(cells, roles: Roles, view: TableView, notes: list[str]) -> RawSegment:
    wave, flux, err, ivar, flags = cells
    sigma = err if err is not None else (None if ivar is None else sigma_from_ivar(ivar))
    mask = None
    if flags is not None and np.asarray(flags).dtype.kind in "biuf":
        mask, note = mask_from_flags(flags, view.infos[roles.mask].comment, roles.mask_asked)
        if note:
            notes.append(note)
    return RawSegment(np.asarray(wave), np.asarray(flux), sigma, mask)


def _unit(view: TableView, roles: Roles, wanted: Wanted, wave, what) -> tuple[WaveUnit, str]:
    if wanted.unit is not None:
        return wanted.unit, ""
    info = view.infos[roles.wave]
    stated = column_unit(info)
    if stated is not None:
        return stated, ""
    if info.unit.strip():
        raise InputRefused(what, f"column '{info.name}' has the unit '{info.unit}', which is no "
                           "wavelength", "choose with --columns or --unit")
    return guess_unit(np.asarray(wave, dtype=float), what)


def _medium_stated(view: TableView, roles: Roles, unit: WaveUnit) -> tuple[str, str] | None:
    info = view.infos[roles.wave]
    ucd = info.ucd.lower()
    if ucd.startswith("em.wl") and "obs.atmos" in ucd:
        return "air", f"UCD {info.ucd} of column {info.name}"
    if unit.vacuum:
        return "vacuum", f"the axis is in {unit.name}"
    if ucd.startswith("em.wl") and view.iv_spectrum:
        return "vacuum", f"UCD {info.ucd} of column {info.name} (IVOA Spectrum)"
    return None


def _role_words(view: TableView, roles: Roles) -> str:
    parts = []
    for role in ("wave", "flux", "err", "ivar", "mask"):
        index = getattr(roles, role)
        if index is not None:
            parts.append(f"{role}={view.infos[index].name or index + 1}")
    return ", ".join(parts)


def raw_from_table(view: TableView, wanted: Wanted, what) -> Raw | None:
    """The table's spectrum; None when it has no wavelength and flux columns.

    Raises InputRefused when the user's choices do not fit or units are unclear.
    """
    if view.rows == 0:
        return None
    view = with_scale(view)
    roles = choose(view.infos, wanted.columns, str(what))
    if roles is None:
        return None
    if view.infos[roles.flux].length == 1 and view.rows < 2:
        return None
    notes = list(view.notes)
    cells, words = _samples(view, roles, wanted, what)
    unit, note = _unit(view, roles, wanted, cells[0][0], what)
    if note:
        notes.append(note)
    segments = tuple(_segment(c, roles, view, notes) for c in cells)
    wave_info = view.infos[roles.wave]
    cards = (*view.cards, Card("TTYPE", wave_info.name, wave_info.comment))
    return Raw(
        segments, unit, f"{view.where}, {words}: {_role_words(view, roles)} ({unit.name})",
        view.infos[roles.flux].unit or view.flux_unit, view.name,
        _medium_stated(view, roles, unit), cards, tuple(dict.fromkeys(notes)),
    )
