"""Orphans: significant features that no catalogue line explains, with what they are not."""

from __future__ import annotations

import numpy as np

from .model import Orphan
from .populations import ORIGIN_OF

UNEXPLAINED = 0.5


def rank_orphans(features, claims, solution, catalogue) -> tuple[Orphan, ...]:
    """Features with P(unlisted) above one half, most significant first."""
    rows = [i for i, c in enumerate(claims) if c.p_unlisted > UNEXPLAINED]
    weight = np.nan_to_num(features.significance)
    rows.sort(key=lambda i: (-weight[i], int(features.number[i])))
    return tuple(_orphan(i, features, claims[i], solution, catalogue) for i in rows)


def _orphan(i, features, claim, solution, catalogue) -> Orphan:
    e = solution.problem.entries
    same = e.sign == features.sign[i]
    near = ""
    if np.any(same):
        distance = np.where(same, np.abs(e.wave - features.wave[i]), np.inf)
        j = int(np.argmin(distance))
        gap = features.wave[i] - e.wave[j]
        origin = ORIGIN_OF[int(e.population[j])]
        near = f"{catalogue.species_of(int(e.row[j]))} ({origin}) {gap:+.3f} A away"
    return Orphan(int(features.number[i]), claim.p_unlisted, near, _why(claim))


def _why(claim) -> str:
    if not claim.candidates:
        return "no predicted line within reach"
    best = claim.candidates[0]
    if abs(best.offset_sigma) > 3:
        return f"{best.species} is {best.offset_sigma:+.1f} sigma off"
    return f"{best.species} fits in place but is predicted too weak or is used elsewhere"
