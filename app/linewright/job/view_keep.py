"""What a person said survives solving again."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..session.feature_edits import add_feature, next_number
from ..session.fit_edits import fit_features
from ..session.model import Claim, HandFit, Session
from ..session.plain import row_to_plain

PERSONS = ("species", "standing", "by", "origin", "chosen", "blend", "flags")


def keep_acts(old: Session, new: Session) -> Session:
    """``new`` (just solved) with the acts, notes, locks and hand picks of ``old``.

    A judged feature is found again as the nearest one of the same sign within half its
    width; the machine's new probabilities and candidates stay. Judged or hand-picked
    features that were not measured again are added with their old measurement. Fits by hand
    stand as they were, in the place of what the machine measured there.
    """
    taken: set[int] = set()
    lost: list[int] = []
    now: dict[int, int] = {}
    claims = list(new.claims)
    for i, claim in enumerate(old.claims):
        if not judged(old, i):
            continue
        j = _same_feature(old, i, new, taken)
        if j is None:
            lost.append(i)
            continue
        taken.add(j)
        now[int(old.features.number[i])] = int(new.features.number[j])
        claims[j] = _merged(claim, claims[j])
    kept = replace(new, claims=tuple(claims), history=(*old.history, *new.history))
    for i in lost:
        now[int(old.features.number[i])] = next_number(kept)
        kept = add_feature(kept, old.features.take([i]), old.claims[i])
    for fit in old.fits:
        kept = _with_fit(old, kept, fit, now)
    return kept


def _with_fit(old: Session, kept: Session, fit: HandFit, now: dict[int, int]) -> Session:
    """``fit`` in the place of what the solve measured inside its limits and nobody knew."""
    numbers = [now[n] for n in fit.features]
    f, g = old.features, kept.features
    segment = f.segment[old.index_of(fit.features[0])]
    others = f.wave[(f.segment == segment) & ~np.isin(f.number, fit.features)]
    inside = (g.segment == segment) & (g.wave > fit.limits[0]) & (g.wave < fit.limits[1])
    for row in np.flatnonzero(inside & ~np.isin(g.number, numbers)):
        reach = max(0.5 * np.nan_to_num(g.fwhm[row]), 0.02)
        if not np.any(np.abs(others - g.wave[row]) <= reach):
            numbers.append(int(g.number[row]))
    rows = [{**row_to_plain(f.take([old.index_of(n)])), "number": now[n]} for n in fit.features]
    return fit_features(kept, numbers, {"limits": list(fit.limits), "profile": fit.profile,
                                        "params": [list(p) for p in fit.params], "rows": rows})


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
