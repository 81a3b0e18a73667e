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
    near = _nearest(features, solution.problem.entries, catalogue, rows)
    return tuple(
        Orphan(int(features.number[i]), claims[i].p_unlisted, words, _why(claims[i]))
        for i, words in zip(rows, near)
    )


def _nearest(features, entries, catalogue, rows) -> list[str]:
    """The nearest entry of each feature's sign, in words; empty where there is none."""
    out = [""] * len(rows)
    for sign in (1, -1):
        same = np.nonzero(entries.sign == sign)[0]
        mine = [k for k, i in enumerate(rows) if features.sign[i] == sign]
        if len(same) == 0 or not mine:
            continue
        wave, place = features.wave[[rows[k] for k in mine]], entries.wave[same]
        right = np.clip(np.searchsorted(place, wave), 1, max(len(place) - 1, 1))
        left, right = right - 1, np.minimum(right, len(place) - 1)
        closer = np.abs(place[right] - wave) < np.abs(place[left] - wave)
        for k, x, j in zip(mine, wave, same[np.where(closer, right, left)]):
            origin = ORIGIN_OF[int(entries.population[j])]
            name = catalogue.species_of(int(entries.row[j]))
            out[k] = f"{name} ({origin}) {x - entries.wave[j]:+.3f} A away"
    return out


def _why(claim) -> str:
    if not claim.candidates:
        return "no predicted line within reach"
    best = claim.candidates[0]
    if abs(best.offset_sigma) > 3:
        return f"{best.species} is {best.offset_sigma:+.1f} sigma off"
    return f"{best.species} fits in place but is predicted too weak or is used elsewhere"
