"""How strong a species that is not seen may still be: the offset below which its lines hide.

A line hides below the equivalent width that the noise allows (measure/limits.py) or inside
the feature that stands in its place. The offset at which it would come out follows from the
strength relation the spectrum has taught, moved up by what a single line may be off it: 95 in a
hundred are off by less. Of the species' best lines the strictest counts.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..measure.gauss import GAUSSIAN_AREA
from .mixture import Solution
from .populations import HYDROGEN, SIGNS, STELLAR, UNGRADED
from .problem import inside

TRIED = 5  # strongest lines of a species that may set its limit
OWNED = 0.5  # least share of its blend
RISES = np.arange(-5.0, 5.01, 0.05)  # dex
FAINTEST = 0.05  # quantile of the features' depths: the limit where no noise was measured
DEEPEST = 0.95  # of a limit: beyond it a line says nothing
REACH = 5.0  # Angstrom on either side in which features may cover a line
NINETY_FIVE = 1.645  # sigma, one-sided, of a normal distribution
WIDEST = 0.5  # dex: the slope far from the lines seen is not known
LN2 = np.log(2.0)
MA = 1e3


def with_limits(rows, solution: Solution | None, catalogue, ew_limit=None):
    """Roll-call rows; those of species with no line seen get limit_dex, limit_wave, limit_ew.

    catalogue: of the solution's entries; ew_limit: function of observed vacuum wavelengths
    (Angstrom, array) giving the least equivalent width (milliangstrom) of a line that would
    be seen; without one the faintest features stand for it. Nothing is said of emission and
    of lines whose depths are not predicted.
    """
    if solution is None or not len(solution.problem.features):
        return rows
    limits = _Limits(solution, catalogue, ew_limit)
    return tuple(limits.row(row) if row.seen == 0 else row for row in rows)


class _Limits:
    def __init__(self, solution: Solution, catalogue, ew_limit):
        self.s, self.catalogue, self.ew_limit = solution, catalogue, ew_limit
        e, f = solution.problem.entries, solution.problem.features
        graded = [k for k in (STELLAR, HYDROGEN) if k not in UNGRADED and SIGNS[k] > 0]
        self.usable = np.isin(e.population, graded) & inside(e.wave, solution.problem.coverage)
        self.usable &= solution.groups.share >= OWNED
        self.name = catalogue.species[e.row]
        width = f.fwhm / f.wave
        self.width = float(np.nanpercentile(width, 25)) if np.any(np.isfinite(width)) else np.nan
        absorbing = (f.sign > 0) & np.isfinite(f.strength)
        depth = 1.0 / (1.0 + 10.0 ** -f.strength[absorbing])
        self.faintest = float(np.quantile(depth, FAINTEST)) if len(depth) else np.nan
        order = np.argsort(f.wave[absorbing], kind="stable")
        self.wave, self.depth = f.wave[absorbing][order], depth[order]
        own = self.width * self.wave
        self.fwhm = np.fmax(np.nan_to_num(f.fwhm[absorbing][order]), own)

    def row(self, row):
        if row.species not in self.catalogue.species_names or not np.isfinite(self.width):
            return row
        mine = self.usable & (self.name == self.catalogue.species_names.index(row.species))
        lines = np.nonzero(mine)[0]
        if not len(lines):
            return row
        e = self.s.problem.entries
        best = lines[np.argsort(-e.strength[lines], kind="stable")[:TRIED]]
        depth = self._hidden(e.wave[best])
        dex = np.array([self._offset(e.strength[i], d, int(e.population[i])) + self._spread(i)
                        for i, d in zip(best, depth)])
        if not np.any(np.isfinite(dex)):
            return row
        k = int(np.nanargmin(dex))
        ew = float(MA * GAUSSIAN_AREA * depth[k] * self.width * e.wave[best[k]])
        wave = float(self.catalogue.wave[e.row[best[k]]])
        return replace(row, limit_dex=float(dex[k]), limit_wave=wave, limit_ew=ew)

    def _hidden(self, wave):
        """Depths up to which lines at these places would not be told apart."""
        fwhm = self.width * wave
        if self.ew_limit is None:
            depth = np.full(len(wave), self.faintest)
        else:
            depth = self.ew_limit(wave) / (MA * GAUSSIAN_AREA * fwhm)
        return np.maximum(depth, [self._covering(x) for x in wave])

    def _covering(self, wave: float) -> float:
        """Depth that the features around have at a place."""
        low, high = np.searchsorted(self.wave, [wave - REACH, wave + REACH])
        near = slice(int(low), int(high))
        away = (self.wave[near] - wave) / self.fwhm[near]
        return float(np.max(self.depth[near] * np.exp(-4 * LN2 * away**2), initial=0.0))

    def _spread(self, entry: int) -> float:
        """dex by which 95 lines in a hundred are at most stronger than predicted: the scatter of
        measured about predicted strengths, or the line's own error of log gf if that is larger."""
        e = self.s.problem.entries
        relation = self.s.state.relation[int(e.population[entry])]
        learned = relation.scatter / float(relation.slope(e.strength[entry]))
        own = float(np.nan_to_num(self.catalogue.loggf_err[e.row[entry]]))
        return NINETY_FIVE * min(max(learned, own), WIDEST)

    def _offset(self, strength: float, depth: float, population: int) -> float:
        """dex that lines must be off the prediction for one of this strength to reach ``depth``.

        Beyond what the relation has learned a weak line's depth goes as its strength; the
        laxer of the two counts.
        """
        if not 0 < depth < DEEPEST:
            return float("nan")
        relation = self.s.state.relation[population]
        wanted = np.log10(depth / (1.0 - depth))
        over = np.nonzero(relation(strength + RISES) >= wanted)[0]
        learned = RISES[over[0]] if len(over) else np.nan
        predicted = 1.0 / (1.0 + 10.0 ** -float(relation(strength)))
        return float(max(learned, np.log10(depth / predicted)))


def carried(rows, before):
    """Rows with the limits of the same species' earlier rows, where they have none."""
    old = {row.species: row for row in before}
    return tuple(
        replace(row, limit_dex=o.limit_dex, limit_wave=o.limit_wave, limit_ew=o.limit_ew)
        if (o := old.get(row.species)) is not None and row.seen == 0
        else row
        for row in rows
    )
