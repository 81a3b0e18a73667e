"""Edits of the feature table itself: add, remove and replace one feature.

Rows stay sorted by segment, then wavelength, claims beside them; numbers are never reused.
"""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np

from ..errors import InputRefused
from ..measure.features import FeatureTable
from .edits import noted, row_of
from .model import Claim, Session
from .plain import plain, row_to_plain


def next_number(session: Session) -> int:
    """One above every number in the table and in the history of added or removed features."""
    used = [int(n) for n in session.features.number]
    for entry in session.history:
        detail = entry.detail
        used.append(int(detail.get("feature") or 0))
        rows = (detail.get("fit") or {}).get("rows") or ()
        used += [int(row.get("number") or 0) for row in (detail.get("row") or {}, *rows)]
    return max(used, default=0) + 1


def add_feature(session: Session, row: FeatureTable, claim: Claim | None = None) -> Session:
    """Add the feature of a one-row table; it gets the next number never used before."""
    claim = claim or Claim()
    numbered = _numbered(session, row, next_number(session))
    table = joined(session.features, numbered)
    table, claims = ordered(table, (*session.claims, claim))
    detail = {"row": row_to_plain(numbered), "claim": plain(claim)}
    return noted(session, "add_feature", detail, features=table, claims=claims)


def remove_feature(session: Session, number: int) -> Session:
    """Take a feature out, with its claim and its entry among the Orphans."""
    row = row_of(session, number)
    keep = np.arange(len(session.features)) != row
    return noted(
        session,
        "remove_feature",
        {"feature": number},
        features=session.features.take(keep),
        claims=session.claims[:row] + session.claims[row + 1 :],
        orphans=tuple(o for o in session.orphans if o.feature != number),
        fits=_without(session, number),
    )


def replace_feature(session: Session, number: int, row: FeatureTable) -> Session:
    """Put new measurements (a one-row table) under the same number; the claim stays."""
    at = row_of(session, number)
    numbered = _numbered(session, row, number)
    keep = np.arange(len(session.features)) != at
    others = session.claims[:at] + session.claims[at + 1 :]
    table = joined(session.features.take(keep), numbered)
    table, claims = ordered(table, (*others, session.claims[at]))
    detail = {"feature": number, "row": row_to_plain(numbered)}
    return noted(session, "replace_feature", detail, features=table, claims=claims,
                 fits=_without(session, number))


def _without(session: Session, number: int) -> tuple:
    """The fits by hand this feature is no component of."""
    return tuple(fit for fit in session.fits if number not in fit.features)


def _numbered(session: Session, row: FeatureTable, number: int) -> FeatureTable:
    if len(row) != 1 or not (np.isfinite(row.wave[0]) and row.wave[0] > 0):
        raise InputRefused("feature", "needs exactly one row with a wavelength above zero")
    if abs(int(row.sign[0])) != 1:
        raise InputRefused("feature", f"sign {row.sign[0]}", "use +1 absorption, -1 emission")
    if not 0 <= int(row.segment[0]) < max(session.spectrum.segments, 1):
        raise InputRefused("feature", f"the spectrum has no segment {int(row.segment[0])}")
    return replace(row, number=np.array([number], dtype=session.features.number.dtype))


def joined(one: FeatureTable, other: FeatureTable) -> FeatureTable:
    """Rows of both, the first's dtypes."""
    columns = {}
    for name in (f.name for f in fields(FeatureTable) if f.name != "flags"):
        first = getattr(one, name)
        second = np.asarray(getattr(other, name)).astype(first.dtype)
        columns[name] = np.concatenate([first, second])
    return FeatureTable(**columns, flags=one.flags + other.flags)


def ordered(table: FeatureTable, claims: tuple) -> tuple[FeatureTable, tuple]:
    """Rows by segment, then wavelength, the claims beside them."""
    order = np.lexsort((table.component, table.wave, table.segment))
    return table.take(order), tuple(claims[i] for i in order)
