"""Orphans: significant features that no catalogue line explains, with what they are not.

Each says which lines near it were weighed and what refused each: the factor of its odds that
speaks most against it.
"""

from __future__ import annotations

import numpy as np

from .breakdown import Breakdown, breakdown_of
from .model import Orphan
from .populations import ORIGIN_OF

UNEXPLAINED = 0.5
WEIGHED = 3  # lines told of each orphan
RARE, REFUSED = -3.0, -1.0  # ln odds: hardly ever shows; a factor that speaks against


def rank_orphans(features, claims, solution, catalogue) -> tuple[Orphan, ...]:
    """Features with P(unlisted) above one half, most significant first; spikes are none."""
    told = {i: c for i, c in enumerate(claims)}
    return in_order(features, orphans_among(told, features, solution, catalogue))


def in_order(features, orphans) -> tuple[Orphan, ...]:
    """Most significant first."""
    weight = dict(zip(features.number.tolist(), np.nan_to_num(features.significance).tolist()))
    return tuple(sorted(orphans, key=lambda o: (-weight[o.feature], o.feature)))


def orphans_among(claims: dict, features, solution, catalogue) -> list[Orphan]:
    """The orphans among some claims, by feature index."""
    rows = [i for i, c in claims.items() if c.p_unlisted > UNEXPLAINED and c.standing != "set aside"]
    near = _nearest(features, solution.problem.entries, catalogue, rows)
    why = _refusals(features, solution, catalogue, rows)
    return [
        Orphan(int(features.number[i]), claims[i].p_unlisted, words, reason)
        for i, words, reason in zip(rows, near, why)
    ]


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


def _refusals(features, solution, catalogue, rows) -> list[str]:
    """Per row the lines that come nearest to explaining it, each with why it does not."""
    wanted = np.full(len(features), -1)
    wanted[rows] = np.arange(len(rows))
    pairs = np.nonzero(wanted[solution.feature] >= 0)[0]
    order = np.lexsort((-solution.probability[pairs], wanted[solution.feature[pairs]]))
    pairs = pairs[order]
    owner = wanted[solution.feature[pairs]]
    first = np.searchsorted(owner, np.arange(len(rows) + 1))
    kept = np.concatenate([np.arange(a, min(b, a + WEIGHED)) for a, b in zip(first, first[1:])]
                          or [np.zeros(0, int)]).astype(int)
    words: list[list[str]] = [[] for _ in rows]
    for k, pair, w in zip(owner[kept], pairs[kept], breakdown_of(solution, pairs[kept])):
        entry = int(solution.entry[pair])
        gap = float(features.wave[solution.feature[pair]] - solution.problem.entries.wave[entry])
        words[k].append(_refusal((_name(solution, catalogue, entry), gap), w, solution, pair))
    return ["; ".join(lines) or "no predicted line within reach" for lines in words]


def _name(solution, catalogue, entry: int) -> str:
    e = solution.problem.entries
    origin = ORIGIN_OF[int(e.population[entry])]
    away = "" if origin == "stellar" else f" ({origin})"
    return f"{catalogue.species_of(int(e.row[entry]))}{away}"


def _refusal(line: tuple[str, float], w: Breakdown, solution, pair: int) -> str:
    """'Fe I is +0.043 Å off, +4.2 sigma', by the factor that speaks most against the line.

    line: its name and the feature's distance, Angstrom.
    """
    name, gap = line
    sigmas = float(solution.offset_sigma[pair])
    place = -0.5 * sigmas**2
    if solution.problem.said is not None and w.free < -100:
        return f"{name} is ruled out by what was said of it"
    worst = min(place, w.show, w.strength, w.free, w.between)
    if worst > REFUSED:
        return f"{name} fits, but not better than an unlisted line"
    if worst == place:
        return f"{name} is {gap:+.3f} Å off, {sigmas:+.1f} sigma"
    if worst == w.free:
        return f"{name} is in place but made another feature"
    if worst == w.between:
        return f"{name} is in place but makes the smaller part of a blend of star and air"
    if worst == w.strength:
        side = "too strong" if w.excess > 0 else "too weak"
        return f"{name} is in place, the feature {abs(w.excess):.1f} dex {side} for it"
    chance = np.exp(w.show) / (1.0 + np.exp(w.show))
    seldom = "hardly ever" if w.show < RARE else "seldom"
    return f"{name} is in place but {seldom} strong enough to show ({chance:.1%})"
