"""Roll call: which species are there, by chance-coincidence statistics.

Hartoog, Cowley & Cowley 1973, ApJ 182, 847: count a species' strongest predicted lines
that coincide with features no other species explains; compare with the count expected
when the list is shifted. The tail is exact (Poisson-binomial), corrected for the number
of species called.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .model import RollRow

LISTED = 60  # strongest predicted lines of a species that are called
SHIFTS = 40  # displaced lists per side that measure the chance rate
EXPECTED = 0.5  # a line is expected where the learned curve gives this, or where it is seen
PRESENT, POSSIBLE = 0.002, 0.05


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
    coincidence = _Coincidences(solution, names)
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


class _Coincidences:
    """Hits of a species' lines on features that other species leave open."""

    def __init__(self, solution, names):
        self.s, self.names = solution, names
        f = solution.problem.features
        self.order = np.argsort(f.wave, kind="stable")
        self.wave, self.sign = f.wave[self.order], f.sign[self.order]
        self.sigma = np.hypot(f.error, 0.03 * np.nan_to_num(f.fwhm))[self.order]
        total = np.bincount(solution.feature, solution.probability, len(f))
        self.total = total

    def tail(self, rows, shows) -> float:
        """P(at least so many hits by chance) for the species of these entries."""
        e = self.s.problem.entries
        ranked = rows[np.argsort(-shows[rows], kind="stable")][:LISTED]
        ranked = ranked[shows[ranked] > 0.01]
        if len(ranked) == 0:
            return 1.0
        openness = self._open(rows)
        hits = self._hits(e.wave[ranked], e.sign[ranked], e.error[ranked], openness)
        rates = self._rates(ranked, openness)
        observed = float(np.sum(hits))
        return poisson_binomial_tail(np.clip(rates, 1e-4, 1.0), observed)

    def _open(self, rows):
        """P(no other species made the feature), in wavelength order."""
        chosen = np.zeros(len(self.names), dtype=bool)
        chosen[rows] = True
        mine = chosen[self.s.entry]
        own = np.bincount(self.s.feature[mine], self.s.probability[mine], len(self.total))
        return np.clip(1.0 - (self.total - own), 0.0, 1.0)[self.order]

    def _hits(self, wave, sign, error, openness):
        index = np.searchsorted(self.wave, wave)
        best = np.zeros(wave.shape)
        for i in (np.maximum(index - 1, 0), np.minimum(index, len(self.wave) - 1)):
            spread = 2.5 * np.sqrt(self.sigma[i] ** 2 + error**2)
            near = (np.abs(self.wave[i] - wave) <= spread) & (self.sign[i] == sign)
            best = np.maximum(best, near * openness[i])
        return best

    def _rates(self, ranked, openness):
        """Chance rate per line, from copies displaced by 0.3 to a few Angstrom."""
        e = self.s.problem.entries
        width = np.maximum(0.3, 8 * np.median(self.sigma))
        shifts = width * (1.0 + 0.37 * np.arange(SHIFTS))
        shifts = np.concatenate((-shifts, shifts))[:, None]
        hits = self._hits(e.wave[ranked] + shifts, e.sign[ranked], e.error[ranked], openness)
        rate = np.sum(hits, axis=0)
        pooled = np.mean(rate) / (2 * SHIFTS)
        return 0.5 * rate / (2 * SHIFTS) + 0.5 * pooled


def poisson_binomial_tail(rates, observed: float) -> float:
    """P(sum of independent Bernoulli(rates) >= observed), exact by convolution."""
    need = int(np.ceil(observed - 1e-9))
    if need <= 0:
        return 1.0
    distribution = np.zeros(len(rates) + 1)
    distribution[0] = 1.0
    for p in rates:
        distribution[1:] = distribution[1:] * (1 - p) + distribution[:-1] * p
        distribution[0] *= 1 - p
    return float(np.clip(np.sum(distribution[need:]), 0.0, 1.0))

