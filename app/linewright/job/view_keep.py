"""What a person said survives solving again."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..session.feature_edits import add_feature
from ..session.model import Claim, Session

PERSONS = ("species", "standing", "by", "origin", "chosen", "blend", "flags")


def keep_acts(old: Session, new: Session) -> Session:
    """``new`` (just solved) with the acts, notes, locks and hand picks of ``old``.

    A judged feature is found again as the nearest one of the same sign within half its
    width; the machine's new probabilities and candidates stay. Judged or hand-picked
    features that were not measured again are added with their old measurement.
    """
    taken: set[int] = set()
    lost: list[int] = []
    claims = list(new.claims)
    for i, claim in enumerate(old.claims):
        if not judged(old, i):
            continue
        j = _same_feature(old, i, new, taken)
        if j is None:
            lost.append(i)
            continue
        taken.add(j)
        claims[j] = _merged(claim, claims[j])
    kept = replace(new, claims=tuple(claims), history=(*old.history, *new.history))
    for i in lost:
        kept = add_feature(kept, old.features.take([i]), old.claims[i])
    return kept


def judged(session: Session, row: int) -> bool:
    claim = session.claims[row]
    hand = "hand" in session.features.flags[row].split()
    return claim.by == "person" or bool(claim.note) or claim.locked or hand


def _merged(old: Claim, new: Claim) -> Claim:
    changes: dict = {"note": old.note, "locked": old.locked}
    if old.by == "person":
        changes.update({name: getattr(old, name) for name in PERSONS})
        # the claimed line is kept explicitly: the machine's first choice may have changed
        changes["chosen"] = None if old.line in new.candidates[:1] else old.line
    return replace(new, **changes)


def _same_feature(old: Session, i: int, new: Session, taken: set[int]) -> int | None:
    f, g = old.features, new.features
    reach = max(0.5 * np.nan_to_num(f.fwhm[i]), 3 * np.nan_to_num(f.wave_err[i]), 0.02)
    near = np.nonzero(
        (np.abs(g.wave - f.wave[i]) <= reach) & (g.segment == f.segment[i]) & (g.sign == f.sign[i])
    )[0]
    near = [j for j in near if int(j) not in taken]
    return int(min(near, key=lambda j: abs(g.wave[j] - f.wave[i]))) if near else None
