"""Orphans: significant features that no catalogue line explains, with what they are not.

Each says where it stands, if that casts doubt on it (in the wing of a far deeper feature, at the
edge of what was searched, among the air's or a molecule's lines), then which lines near it were
weighed and what refused each: the factor of its odds that speaks most against it. Those that
may be a part of another feature, or of an edge, come after the others.
"""

from __future__ import annotations

import numpy as np

from .breakdown import Breakdown, breakdown_of
from .model import Orphan
from .populations import ORIGIN_OF
from .problem import inside
from .velocity import TELLURIC_RANGES

UNEXPLAINED = 0.5
WEIGHED = 3  # lines told of each orphan
RARE, REFUSED = -3.0, -1.0  # ln odds: hardly ever shows; a factor that speaks against
DEEPER, BESIDE = 3.0, 1.0  # times as deep; of both widths together: in the wing of a feature
EDGE = 5.0  # own widths from the end of what was searched
WING, END = "in the wing of", "from the edge of what was searched"
RISES = np.arange(0.0, 8.01, 0.05)  # dex


def rank_orphans(features, claims, solution, catalogue) -> tuple[Orphan, ...]:
    """Features with P(unlisted) above one half, in order of ``in_order``; spikes are none."""
    told = {i: c for i, c in enumerate(claims)}
    return in_order(features, orphans_among(told, features, solution, catalogue))


def in_order(features, orphans) -> tuple[Orphan, ...]:
    """Most significant first, those that may be a part of another feature or of an edge last.

    A feature that stands out of the sum of its neighbours counts by its own fitted depth.
    """
    weight = np.nan_to_num(np.fmin(features.significance, np.abs(features.depth) / features.depth_err))
    weight = dict(zip(features.number.tolist(), weight.tolist()))
    return tuple(sorted(orphans, key=lambda o: (_doubted(o), -weight[o.feature], o.feature)))


def _doubted(orphan: Orphan) -> bool:
    return any(w.startswith(WING) or w.endswith(END) for w in orphan.why.split("; "))


def orphans_among(claims: dict, features, solution, catalogue) -> list[Orphan]:
    """The orphans among some claims, by feature index."""
    rows = [i for i, c in claims.items() if c.p_unlisted > UNEXPLAINED and c.standing != "set aside"]
    near = _nearest(features, solution.problem.entries, catalogue, rows)
    why = _refusals(features, solution, catalogue, rows)
    beside = _beside_all(features, rows, _names(solution, catalogue))
    return [
        Orphan(
            int(features.number[i]), claims[i].p_unlisted, words,
            "; ".join([*wing, *_at_edge(features, solution, i), *_among(features, claims, i), reason]),
        )
        for i, words, wing, reason in zip(rows, near, beside, why)
    ]  # fmt: skip


def _names(solution, catalogue) -> dict[int, str]:
    """Species of the features that have a likely line."""
    likely = np.nonzero(solution.probability > UNEXPLAINED)[0]
    rows = solution.problem.entries.row[solution.entry[likely]]
    names = catalogue.species[rows]
    return {int(f): catalogue.species_names[int(n)] for f, n in zip(solution.feature[likely], names)}


def _beside_all(features, rows, names: dict[int, str]) -> list[list[str]]:
    """For each row whether a far deeper feature of its sign reaches as far, in words."""
    if not rows:
        return []
    around = _within_reach(features, rows)
    return [_beside(features, names, i, others) for i, others in zip(rows, around)]


def _within_reach(features, rows):
    """For each row the features whose widths may reach it."""
    order = np.argsort(features.wave, kind="stable")
    place, width = features.wave[order], np.nan_to_num(features.fwhm)
    reach = BESIDE * (width[rows] + np.max(width, initial=0.0))
    low = np.searchsorted(place, features.wave[rows] - reach)
    high = np.searchsorted(place, features.wave[rows] + reach)
    return [order[a:b] for a, b in zip(low, high)]


def _beside(features, names: dict[int, str], i: int, others) -> list[str]:
    """Says so where a far deeper feature of the same sign reaches as far as this one."""
    gap = np.abs(features.wave[others] - features.wave[i])
    reach = BESIDE * np.nan_to_num(features.fwhm[others] + features.fwhm[i])
    times = np.abs(features.depth[others]) / max(abs(float(features.depth[i])), 1e-9)
    near = (features.sign[others] == features.sign[i]) & (gap < reach)
    near &= np.nan_to_num(times) >= DEEPER
    if not np.any(near):
        return []
    k = int(np.argmax(np.where(near, times, 0.0)))
    named = names.get(int(others[k]), "a feature")
    return [f"{WING} {named} {gap[k]:.2f} Å away, {times[k]:.0f} times as deep"]


def _at_edge(features, solution, i: int) -> list[str]:
    """Says so near the end of what was searched, where the continuum hangs on one side."""
    width = float(np.nan_to_num(features.fwhm[i]))
    away = float(np.min(np.abs(solution.problem.coverage - features.wave[i])))
    return [f"{away:.2f} Å {END}"] if away < EDGE * width else []


def _among(features, claims, i: int) -> list[str]:
    """Says so among lines that no list gives one by one."""
    words = []
    if features.sign[i] > 0 and inside(features.wave[i : i + 1], TELLURIC_RANGES)[0]:
        words.append("where the air absorbs")
    if "in-band" in claims[i].flags.split():
        words.append("inside a molecular band")
    return words


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
    return f"{name} is in place but {_unseen(solution, pair, w.show)}"


def _unseen(solution, pair: int, show: float) -> str:
    """Why a line hardly makes features: its blend is too weak, or it is a small part of it.

    show: ln odds that it does. Too weak by how much: up to the strength at which half of such
    lines show, as far as any do.
    """
    entry = int(solution.entry[pair])
    total, share = solution.groups.total[entry], float(solution.groups.share[entry])
    curve = solution.state.detection[int(solution.problem.entries.population[entry])]
    if share < min(float(curve(total)), 0.5):
        return f"is only {share:.1%} of its blend"
    chance = np.exp(show) / (1.0 + np.exp(show))
    seldom = "hardly ever" if show < RARE else "seldom"
    rising = curve(total + RISES)
    enough = np.nonzero(rising >= 0.5 * rising[-1])[0]
    short = f", {RISES[enough[0]]:.1f} dex too weak" if len(enough) and enough[0] > 0 else ""
    return f"{seldom} strong enough to show ({chance:.1%}{short})"
