"""What differs between two sessions: the way from one to the other in little room."""

from __future__ import annotations

import weakref
from dataclasses import dataclass, fields, replace

from .model import Session

_SPARSE = 8  # claims are kept row by row when fewer than one in this many changed


@dataclass(frozen=True, eq=False)
class Change:
    """Makes the later session from the earlier one.

    others: fields that were replaced; rows: (row, claim) of changed claims, None when the
    claims are among ``others``; kept, added: of the history, how many entries stay and what
    follows them; goal: the later session itself while someone else still holds it
    """

    others: dict
    rows: tuple | None
    kept: int
    added: tuple
    goal: weakref.ref

    def apply(self, start: Session) -> Session:
        """The later session; ``start`` must be the one the change was taken from."""
        known = self.goal()
        if known is not None:
            return known
        changes = dict(self.others)
        if self.rows:
            claims = list(start.claims)
            for row, claim in self.rows:
                claims[row] = claim
            changes["claims"] = tuple(claims)
        changes["history"] = (*start.history[: self.kept], *self.added)
        return replace(start, **changes)


def change_between(start: Session, goal: Session) -> Change:
    """What makes ``goal`` of ``start``; unchanged parts are not held."""
    rows = _changed_rows(start.claims, goal.claims)
    apart = {"history"} if rows is None else {"history", "claims"}
    others = {f.name: getattr(goal, f.name) for f in fields(Session) if f.name not in apart
              and getattr(goal, f.name) is not getattr(start, f.name)}
    kept = _common(start.history, goal.history)
    return Change(others, rows, kept, goal.history[kept:], weakref.ref(goal))


def _changed_rows(old: tuple, new: tuple) -> tuple | None:
    if old is new:
        return ()
    if len(old) != len(new):
        return None
    rows = tuple((k, b) for k, (a, b) in enumerate(zip(old, new)) if a is not b)
    return rows if _SPARSE * len(rows) <= len(new) else None


def _common(old: tuple, new: tuple) -> int:
    """Length of the beginning two histories share."""
    most = min(len(old), len(new))
    return next((k for k in range(most) if old[k] is not new[k]), most)
