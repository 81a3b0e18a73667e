"""Rows of the Ledger that claims add to the measured ones: heads of bands, reversed cores.

They are no lines that the mixture weighs: what they are was decided where they were found.
"""

from __future__ import annotations

from dataclasses import fields
from functools import lru_cache

import numpy as np

from ..measure.features import FeatureTable

BAND, CORE = "band", "core"


def with_rows(features: FeatureTable, claims, rows: FeatureTable, new):
    """(features, claims) with rows added in order, numbered on from the last.

    rows: FeatureTable, numbers ignored; new: their claims.
    """
    columns = {}
    for field in fields(FeatureTable):
        old, more = getattr(features, field.name), getattr(rows, field.name)
        if field.name == "number":
            more = int(features.number.max(initial=0)) + 1 + np.arange(len(rows))
        columns[field.name] = old + more if field.name == "flags" else np.concatenate([old, more])
    order = np.lexsort((columns["wave"], columns["segment"]))
    both = [*claims, *new]
    return FeatureTable(**columns).take(order), tuple(both[i] for i in order)


def flagged_as(features: FeatureTable, words):
    """True where a feature carries one of the flags; (f,)."""
    return _carrying(features.flags, tuple(words)).copy()


@lru_cache(maxsize=8)  # tables are frozen, and asked again after every act of a person
def _carrying(flags: tuple[str, ...], words: tuple[str, ...]):
    return np.array([not set(words).isdisjoint(f.split()) for f in flags], dtype=bool)
