"""A table of any file as the readers see it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from .columns import ColumnInfo
from .raw import Card


@dataclass(frozen=True)
class TableView:
    """A table's columns and how to fetch one: ``fetch(i)`` has shape (rows,) or (rows, n)."""

    where: str
    infos: list[ColumnInfo]
    rows: int
    fetch: Callable[[int], np.ndarray]
    cards: tuple[Card, ...] = ()
    flux_unit: str = ""
    name: str = ""
    iv_spectrum: bool = False
    notes: tuple[str, ...] = field(default=())
