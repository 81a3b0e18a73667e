"""A person's word carried to the other claims: what would change, and the changed session."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace

import numpy as np

from ..claims.band_claims import is_band
from ..measure.features import FeatureTable
from ..session.model import Claim, HistoryEntry, Session, VelocityResult
from .reweigh import Change, Told, prepare, told, with_told

WORDS = ("accept_candidate", "set_species", "set_aside", "set_standing", "restore")


@dataclass(frozen=True, eq=False)
class Weighed:
    """before: the session that was weighed; after: its claims in the light of the person's
    words; changes: claims whose species or standing differ
    """

    before: Session
    after: Session
    changes: tuple[Change, ...]

    def state(self, now: Session) -> str:
        """'would change', 'changed', or 'changed in part', by what a session says."""
        rows = {int(n): i for i, n in enumerate(now.features.number)}
        said = [(now.claims[rows[c.feature]].species, now.claims[rows[c.feature]].standing)
                if c.feature in rows else None for c in self.changes]
        done = sum(words == change.after for words, change in zip(said, self.changes))
        if done == len(self.changes):
            return "changed"
        return "changed in part" if done else "would change"


def can_reweigh(session: Session) -> bool:
    """True once a solve has found velocity and temperature."""
    return bool(len(session.features) and np.isfinite(session.temperature_k)
                and np.isfinite(session.velocity.velocity))


def new_word(old: Session | None, new: Session) -> bool:
    """Whether the step from old to new is a person's act that the other claims may heed."""
    return (old is not None and len(new.history) == len(old.history) + 1
            and new.history[-1].by == "person" and new.history[-1].action in WORDS
            and can_reweigh(new))


_ANY = Claim()  # in the place of a machine claim, which tells nothing


def spoken(session: Session) -> Session:
    """What weighing again needs of a session: little enough to be sent for every word."""
    bands = is_band(session.features)
    claims = tuple(
        c if c.by == "person" or c.locked or c.standing == "set aside" or bands[i] else _ANY
        for i, c in enumerate(session.claims)
    )
    return replace(
        session, claims=claims, velocity=VelocityResult(session.velocity.velocity), roll_call=(),
        orphans=(), continuum=(), anchors=(), fits=(), temperatures=(), history=(),
    )  # fmt: skip


def told_of(session: Session, progress=None) -> Told:
    """What the words of a ``spoken`` session tell."""
    return told(replace(session, features=_the_same(session.features)), progress=progress)


def made_ready(session: Session) -> None:
    """So that the first word on a ``spoken`` session is answered as fast as the next."""
    prepare(replace(session, features=_the_same(session.features)))


def weighed_with(session: Session, told: Told) -> Weighed:
    """A session and what its words make of it."""
    after, changes = with_told(session, told)
    return Weighed(session, after, tuple(filter(_claims, changes)))


def _claims(change: Change) -> bool:
    """False where an unclaimed feature only has another best guess."""
    return not change.before[1] == change.after[1] == "unclaimed"


_last: list[FeatureTable] = []


def _the_same(features: FeatureTable) -> FeatureTable:
    """The table of the last call where it is equal: what came through a pipe is a copy, and
    ``reweigh`` keeps what it settled for one table."""
    if not (_last and _equal(_last[0], features)):
        _last[:] = [features]
    return _last[0]


def _equal(a: FeatureTable, b: FeatureTable) -> bool:
    if a.flags != b.flags or len(a) != len(b):
        return False
    return all(np.array_equal(getattr(a, f.name), getattr(b, f.name), equal_nan=True)
               for f in fields(FeatureTable) if f.name != "flags")


def carried_over(session: Session, weighed: Weighed) -> Session:
    """``session``, which was weighed, with the new claims: one step, and what did not change
    stays the same object. Claims a person made or locked are the session's own."""
    claims = tuple(
        old if old is new or old.by == "person" or old.locked or old == new else new
        for old, new in zip(session.claims, weighed.after.claims, strict=True))
    entry = HistoryEntry("reweigh", {"changed": len(weighed.changes)}, "machine")
    return replace(session, claims=claims, roll_call=weighed.after.roll_call,
                   orphans=weighed.after.orphans, history=(*session.history, entry))
