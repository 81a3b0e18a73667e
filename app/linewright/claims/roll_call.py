"""Roll call: which species are there, by chance-coincidence statistics.

A species' strongest predicted lines are held against features no other species explains
(coincidence.py); the tail is corrected for the number of species called (Bonferroni).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .coincidence import Coincidences
from .model import RollRow

EXPECTED = 0.5  # a line is expected where the learned curve gives this, or where it is seen
PRESENT, POSSIBLE = 0.01, 0.05  # of the chance to call any one species of the list by mistake


def call_roll(solution, catalogue, components, heard=None) -> tuple[RollRow, ...]:
    """One row per species with a predicted line in coverage, most claims first.

    The chance probability inherits the certainty of the species' component, as claims do:
    lines at a velocity that was only fitted to the features coincide with them anyway.
    heard: (species indices of the catalogue, rows of an earlier call by species): the rows of
    all other species stay as they were, unless the number of species on trial changed.
    """
    e = solution.problem.entries
    certainty = np.array([c.certainty for c in components])[e.component]
    names = catalogue.species[e.row]
    seen = np.bincount(solution.entry, solution.probability, len(e))
    shows = _shows(solution)
    groups = _on_trial(names, shows, seen)
    kept = {} if heard is None else _kept(groups, catalogue, heard)
    coincidence = Coincidences(solution)
    table = list(kept.values())
    for name, rows in groups.items():
        if name in kept:
            continue
        tail = min(1.0, coincidence.tail(rows, shows) * len(groups))
        chance = 1.0 - (1.0 - tail) * float(np.max(certainty[rows]))
        count = _Count(seen[rows], shows[rows], chance)
        species = e.species[rows[0]]
        table.append(_row(catalogue.species_names[name], count, solution.state, species))
    return in_order(table)


def in_order(rows) -> tuple[RollRow, ...]:
    """Most claims first."""
    return tuple(sorted(rows, key=lambda r: (-r.seen, r.p_chance, r.species)))


def _on_trial(names, shows, seen) -> dict:
    """Rows of each species' entries, for the species that may show a line."""
    order = np.argsort(names.astype(np.uint16), kind="stable")  # a radix sort, in this size
    start = np.nonzero(np.diff(names[order], prepend=-1))[0]
    rows = np.split(order, start[1:]) if len(order) else []
    return {
        int(names[mine[0]]): mine
        for mine in rows
        if np.max(shows[mine]) > 0.02 or np.sum(seen[mine]) > 0.5
    }


def _kept(groups, catalogue, heard) -> dict:
    """Earlier rows that stand, by species index."""
    changed, before = heard
    if len(before) != len(groups):
        return {}
    changed, spell = set(np.asarray(changed).tolist()), catalogue.species_names
    return {n: before[spell[n]] for n in groups if n not in changed and spell[n] in before}


def _shows(solution):
    """P(the entry makes a feature), from the learned curves without the species' offset."""
    e = solution.problem.entries
    out = np.zeros(len(e))
    for k, curve in enumerate(solution.state.detection):
        here = e.population == k
        out[here] = curve(e.strength[here])
    return out * solution.groups.share


@dataclass(frozen=True, eq=False)
class _Count:
    """A species' lines: P(seen) and P(shows) per line, corrected chance probability."""

    seen: np.ndarray
    shows: np.ndarray
    p_chance: float


def _row(name: str, count: _Count, state, species: int) -> RollRow:
    seen = count.seen > 0.5
    expected, number = int(np.sum((count.shows >= EXPECTED) | seen)), int(np.sum(seen))
    return RollRow(
        name,
        expected,
        number,
        expected - number,
        count.p_chance,
        float(state.offsets[species]),
        float(state.offset_errors[species]),
        _verdict(expected, number, count.p_chance, float(np.sum(count.shows))),
    )


def _verdict(expected: int, number: int, p_chance: float, hoped: float) -> str:
    if p_chance < PRESENT and number >= 1:
        return "present"
    if number >= 1 or p_chance < POSSIBLE:
        return "possible"
    return "absent" if expected >= 3 or hoped >= 3.0 else "not testable"
