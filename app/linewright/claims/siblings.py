"""Lines of a species whose being seen would teach most: expected ones that are missing, and
strong ones that stand outside the coverage."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from .offsets import GRID
from .populations import HYDROGEN, NEBULAR, SIGNS, STELLAR, UNGRADED
from .problem import inside

EXPECTED, SEEN = 0.3, 0.2  # P(shows) of a line that should be seen; P(seen) of one that is not
OWNED = 0.5  # least share of its blend
HIDES = 0.9  # of its FWHM: so far a feature has a tenth of its depth, and hides a line


def with_siblings(rows, solution, catalogue):
    """Roll-call rows with their strongest missing line and strongest line outside coverage.

    The species' offset is taken as normal about its value; a line seen weighs it by P(shows)
    and, where it counted as missing before, takes back 1 - P(shows).
    """
    return tuple(map(_Lines(solution, catalogue).row, rows))


def _under_features(entries, features):
    """True where a line stands inside a feature of its sign, which may hide it; (n,)."""
    out = np.zeros(len(entries), dtype=bool)
    width = np.fmax(HIDES * np.nan_to_num(features.fwhm), 0.03)
    for sign in (1, -1):
        mine = features.sign == sign
        low = np.searchsorted(entries.wave, features.wave[mine] - width[mine])
        high = np.searchsorted(entries.wave, features.wave[mine] + width[mine])
        steps = np.bincount(low, minlength=len(out) + 1) - np.bincount(high, minlength=len(out) + 1)
        out |= (np.cumsum(steps)[:-1] > 0) & (entries.sign == sign)
    return out


class _Lines:
    """Chance to show of every entry, for its species' offset and for displaced ones."""

    def __init__(self, solution, catalogue):
        self.s, self.catalogue = solution, catalogue
        e = solution.problem.entries
        self.covered = inside(e.wave, solution.problem.coverage)
        self.seen = np.bincount(solution.entry, solution.probability, len(e))
        self.shows = np.zeros(len(e))
        for k, curve in enumerate(solution.state.detection):
            here = e.population == k
            self.shows[here] = curve(solution.groups.total[here])
        self.name = catalogue.species[e.row]
        self.bare = ~_under_features(e, solution.problem.features)
        self.usable = np.isin(e.population, (STELLAR, HYDROGEN, NEBULAR))

    def row(self, row):
        if row.species not in self.catalogue.species_names:
            return row
        mine = (self.name == self.catalogue.species_names.index(row.species)) & self.usable
        mine &= (self.s.groups.share >= OWNED) & (self.shows >= EXPECTED)
        missing = np.nonzero(mine & self.covered & self.bare & (self.seen < SEEN))[0]
        gap = np.nonzero(mine & ~self.covered)[0]
        found = {}
        for word, lines, counted in (("missing", missing, True), ("gap", gap, False)):
            if len(lines):
                found |= self._named(word, lines[np.argmax(self.shows[lines])], row, counted)
        return replace(row, **found) if found else row

    def _named(self, word: str, entry: int, row, counted: bool) -> dict:
        wave = float(self.catalogue.wave[self.s.problem.entries.row[entry]])
        shift = self._shift(entry, row, counted)
        return {f"{word}_wave": wave, f"{word}_depth": self._depth(entry), f"{word}_shift": shift}

    def _depth(self, entry: int) -> float:
        k = int(self.s.problem.entries.population[entry])
        if k in UNGRADED or SIGNS[k] < 0:
            return float("nan")
        relation = self.s.state.relation[k]
        return float(1.0 / (1.0 + 10.0 ** -relation(self.s.groups.total[entry])))

    def _shift(self, entry: int, row, counted: bool) -> float:
        """Rise of the offset's mean, dex, were the line seen."""
        if not (np.isfinite(row.offset_dex) and row.offset_err > 0):
            return float("nan")
        curve = self.s.state.detection[int(self.s.problem.entries.population[entry])]
        chance = curve(self.s.groups.total[entry] + GRID - row.offset_dex)
        before = np.exp(-0.5 * ((GRID - row.offset_dex) / row.offset_err) ** 2)
        after = before * chance / (1.0 - chance if counted else 1.0)
        return float(after @ GRID / after.sum() - before @ GRID / before.sum())
