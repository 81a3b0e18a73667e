"""Lines of the catalogue for the window's table: found and put in order away from it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..lines.catalogue import LineCatalogue
from ..lines.search import search
from .view_line_words import Asked

ORDERS = ("wave", "species", "e_low", "loggf", "depth", "grade", "origin", "source")


@dataclass(frozen=True)
class Order:
    """by: one of ORDERS; down: the largest first."""

    by: str = "wave"
    down: bool = False


def lines_found(
    catalogue: LineCatalogue, depth: np.ndarray | None, asked: Asked, order: Order = Order()
) -> np.ndarray:
    """Rows of the lines that fit, in display order, shape (m,).

    depth: predicted depth of each line, shape (n,), or None while it is not known: then
    ``asked.depth_above`` is not applied. Absent values come last either way. Raises
    InputRefused as ``search``.
    """
    rows = search(catalogue, asked.query)
    if asked.depth_above > 0 and depth is not None:
        rows = rows[np.nan_to_num(np.abs(depth[rows])) >= asked.depth_above]
    if order.by == "wave":
        return rows[::-1] if order.down else rows
    keys = _keys(catalogue, depth, order.by, rows)
    place = np.argsort(-keys if order.down else keys, kind="stable")  # NaN is last for both
    return rows[place]


def _keys(catalogue: LineCatalogue, depth, by: str, rows: np.ndarray) -> np.ndarray:
    """Numbers that order the rows; names by their place in the alphabet."""
    if by == "depth":
        return np.full(len(rows), np.nan) if depth is None else depth[rows]
    column = getattr(catalogue, by)[rows]
    if by == "species":
        return _rank(catalogue.species_names)[column]
    if by == "source":
        return _rank(catalogue.source_keys)[column]
    if by == "grade":  # A first; no grade last
        return np.where(column > 0, column.astype(float), np.nan)
    return column.astype(float)


def _rank(names: tuple[str, ...]) -> np.ndarray:
    rank = np.empty(len(names))
    rank[sorted(range(len(names)), key=names.__getitem__)] = np.arange(len(names))
    return rank


def at_rest(span, velocity: float):
    """(low, high) seen in a spectrum as laboratory wavelengths; None stays None."""
    from ..spectra.medium import C_KM_S

    return None if span is None else tuple(w / (1.0 + velocity / C_KM_S) for w in span)
