"""Which features and lines stand near enough to be matched, and what of that stays fixed
while the engine learns."""

from __future__ import annotations

from copy import copy
from dataclasses import dataclass

import numpy as np

from .entries import Neighbourhood
from .populations import STELLAR
from .problem import Problem, find_pairs, inside
from .unlisted import StrengthBins

TAIL_FACTOR, TAIL_FLOOR = 3.5, 0.02  # heavy tail of position errors: widening, Angstrom
CENTRING = 0.03  # of the FWHM: asymmetries and blends limit any centroid


@dataclass(frozen=True, eq=False)
class Block:
    """One population's part of a problem.

    entries, pairs: row indices; graded: those of its pairs with a measured strength, empty
    where the population's depths are not predicted
    names: species index of each of its entries from 0 without holes; species: the indices
    these stand for, in the problem's numbering
    """

    population: int
    entries: np.ndarray
    pairs: np.ndarray
    graded: np.ndarray
    covered: np.ndarray
    names: np.ndarray
    species: np.ndarray


class Pairs:
    """Pairs (p,) of a problem with everything that stays fixed over the rounds."""

    _columns = ("feature", "entry", "m", "m_variance", "wave", "own", "crowded",
                "base_variance", "line_variance", "species", "population")  # fmt: skip

    def __init__(self, problem: Problem):
        f, e = problem.features, problem.entries
        self.base = np.sqrt(
            f.error**2 + (CENTRING * np.nan_to_num(f.fwhm)) ** 2 + f.excess**2
        )
        reach = 3.5 * np.maximum(TAIL_FACTOR * 1.5 * self.base, TAIL_FLOOR)
        self.feature, self.entry = find_pairs(f, e, np.minimum(reach, 12 * self.base + 0.25))
        self.covered = inside(e.wave, problem.coverage).astype(float)
        self.near = Neighbourhood(e.wave, e.population, problem.group_half_width, (STELLAR,))
        self.bins = StrengthBins(f.sign, f.strength)
        self.m = f.strength[self.feature]
        self.m_variance = np.nan_to_num(f.strength_err[self.feature]) ** 2
        if problem.strength_err is not None:
            self.m_variance = self.m_variance + problem.strength_err[self.entry] ** 2
        self.wave = f.wave[self.feature]
        self.own = self.wave - e.wave[self.entry]
        self.crowded = f.crowded[self.feature].astype(int)
        self.base_variance = self.base[self.feature] ** 2
        self.line_variance = e.error[self.entry] ** 2
        self.species, self.population = e.species[self.entry], e.population[self.entry]
        self.blocks = self._blocks(problem, np.arange(len(e)))

    def only(self, problem: Problem, which, entries=None) -> "Pairs":
        """The pairs of these indices, ascending; entries: rows that their blocks hold,
        ascending, by default those of the pairs."""
        part = copy(self)
        for name in self._columns:
            setattr(part, name, getattr(self, name)[which])
        if entries is None:
            used = np.zeros(len(self.covered), dtype=bool)
            used[part.entry] = True
            entries = np.nonzero(used)[0]
        part.blocks = part._blocks(problem, entries)
        return part

    def _blocks(self, problem: Problem, entries) -> tuple[Block, ...]:
        population = problem.entries.population[entries]
        return tuple(
            self._block(problem, int(k), entries[population == k]) for k in np.unique(population)
        )

    def _block(self, problem: Problem, population: int, entries) -> Block:
        own = problem.entries.species[entries]
        pairs = np.nonzero(self.population == population)[0]
        graded = pairs[np.isfinite(self.m[pairs])]
        if population in problem.ungraded:
            graded = graded[:0]
        used = np.bincount(own, minlength=problem.species) > 0
        species, names = np.nonzero(used)[0], (np.cumsum(used) - 1)[own]
        covered = np.nonzero(self.covered[entries] > 0)[0]
        return Block(population, entries, pairs, graded, covered, names, species)
