"""A table of any file as the readers see it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from .columns import ColumnInfo
from .raw import Card


@dataclass(frozen=True)
class TableView:
    """A table's columns and how to fetch one: ``fetch(i)`` has shape (rows,) or (rows, n).

    fetch_many: several at once where that is cheaper
    """

    where: str
    infos: list[ColumnInfo]
    rows: int
    fetch: Callable[[int], np.ndarray]
    cards: tuple[Card, ...] = ()
    flux_unit: str = ""
    name: str = ""
    iv_spectrum: bool = False
    notes: tuple[str, ...] = field(default=())
    fetch_many: Callable[[list[int]], list[np.ndarray]] | None = None

    def columns(self, indices) -> list[np.ndarray | None]:
        """Those columns; None where the index is None."""
        wanted = [i for i in indices if i is not None]
        many = self.fetch_many or (lambda chosen: [np.asarray(self.fetch(i)) for i in chosen])
        found = dict(zip(wanted, many(wanted), strict=True))
        return [None if i is None else found[i] for i in indices]
