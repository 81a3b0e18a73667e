"""Chance coincidence of a species' lines with features that other species leave open.

Hartoog, Cowley & Cowley 1973, ApJ 182, 847, compare the hits of a line list with those of
displaced lists. Here a hit counts by its evidence: how likely the line is to show, how well it
stands in place and whether the feature is as strong as it should be, against a chance feature.
What displaced copies of each line gather is its chance distribution; their convolution gives
the tail of the sum. A line's own evidence is one of the copies' (the permutation test's rule),
so a tail is never smaller than the copies can tell.
"""

from __future__ import annotations

import numpy as np

from .mixture import tailed
from .populations import HYDROGEN
from .problem import inside

LISTED, LEAST = 60, 0.01  # strongest predicted lines that are called; least chance to show
COPIES, FEWEST, MOST = 3000, 60, 400  # of all lines together, and of one, a side
FIRST, CLEAR, STEP = 0.3, 8.0, 2.0  # Angstrom, or sigma, the larger; sigma
WIDTH_SHARE = 0.03  # of the FWHM: position error of any feature
REACH, FAR = 8.0, 0.07  # sigma and Angstrom: beyond the larger nothing coincides
OWN_OFFSET = 0.3  # dex: what a species' strengths may be off
ODD_STRENGTH = 0.1  # share of lines of any strength
ANY_STRENGTH = 0.25  # per dex: strengths of chance features
BIN, TOP = 0.2, 6.4  # of the evidence, natural logarithm


class Coincidences:
    """The features of a solution, ready for the lines of one species after the other."""

    def __init__(self, solution):
        self.s = solution
        problem, f = solution.problem, solution.problem.features
        order = np.argsort(f.wave, kind="stable")
        self.order, self.wave, self.sign = order, f.wave[order], f.sign[order]
        scale = solution.state.error_scale[f.crowded[order].astype(int)]
        error = f.error[order] * scale
        self.variance = error**2 + (WIDTH_SHARE * np.nan_to_num(f.fwhm[order])) ** 2
        self.strength, self.strength_err = f.strength[order], f.strength_err[order]
        self.rare = _broader(f.fwhm[order] / f.wave[order])
        self.total = np.bincount(solution.feature, solution.probability, len(f))
        self.sigma = float(np.median(np.sqrt(self.variance)))
        self.length = problem.length()

    def tail(self, rows, shows) -> float:
        """P(at least so much evidence by chance) for the species of these entries.

        rows: of the entries; shows: P(each entry makes a feature), (n,).
        """
        ranked = rows[np.argsort(-shows[rows], kind="stable")][:LISTED]
        ranked = ranked[shows[ranked] > LEAST]
        if len(ranked) == 0:
            return 1.0
        openness = self._open(rows)
        count = int(np.clip(COPIES // len(ranked), FEWEST, MOST))
        steps = max(FIRST, CLEAR * self.sigma) + STEP * self.sigma * np.arange(count)
        shifts = np.concatenate(([0.0], -steps, steps))[:, None]
        evidence = self._evidence(ranked, shifts, shows[ranked], openness)
        place = self.s.problem.entries.wave[ranked] + shifts
        return tail_of(evidence, inside(place, self.s.problem.coverage))

    def _open(self, rows):
        """P(no other species made the feature), in wavelength order."""
        mine = np.zeros(len(self.s.problem.entries), dtype=bool)
        mine[rows] = True
        mine = mine[self.s.entry]
        own = np.bincount(self.s.feature[mine], self.s.probability[mine], len(self.total))
        return np.clip(1.0 - (self.total - own), 0.0, 1.0)[self.order]

    def _evidence(self, lines, shifts, shows, openness):
        """(copies, lines) ln(1 + chance to show x likelihood over chance), displaced by ``shifts``
        (copies, 1), Angstrom."""
        e = self.s.problem.entries
        wave = e.wave[lines] + shifts
        feature, gap = self._nearest(wave)
        spread = e.error[lines] ** 2 + self.s.state.scatter[e.species[lines]] ** 2
        variance = self.variance[feature] + spread
        reach = np.maximum(REACH**2 * variance, FAR**2)
        near = (gap**2 < reach) & (self.sign[feature] == e.sign[lines])
        copy, line = np.nonzero(near)
        feature = feature[near]
        place = tailed(gap[near], np.sqrt(variance[near]))
        chance = float(np.sum(openness)) / self.length + 1e-9
        likely = openness[feature] * place / chance * self._fits(lines[line], feature)
        out = np.zeros(wave.shape)
        out[copy, line] = np.log1p(shows[line] * likely)
        return out

    def _nearest(self, wave):
        """(feature nearest each place, its distance in Angstrom)."""
        right = np.clip(np.searchsorted(self.wave, wave), 0, len(self.wave) - 1)
        left = np.maximum(right - 1, 0)
        below, above = self.wave[left] - wave, self.wave[right] - wave
        closer = np.abs(above) < np.abs(below)
        return np.where(closer, right, left), np.where(closer, above, below)

    def _fits(self, entries, feature):
        """Likelihood of the features' strengths over chance, (p,), for pairs."""
        e, out = self.s.problem.entries, np.ones(len(feature))
        population = e.population[entries]
        for k in np.unique(population):
            here = population == k
            some = feature[here]
            if k == HYDROGEN:
                out[here] = self.rare[some]
            elif k not in self.s.problem.ungraded:
                relation = self.s.state.relation[k]
                error = np.nan_to_num(self.strength_err[some])
                width = np.sqrt(relation.scatter**2 + OWN_OFFSET**2 + error**2)
                z = (self.strength[some] - relation(e.strength[entries[here]])) / width
                fit = np.exp(-0.5 * z * z) / (width * np.sqrt(2 * np.pi)) / ANY_STRENGTH
                out[here] = np.where(np.isfinite(fit), (1 - ODD_STRENGTH) * fit + ODD_STRENGTH, 1.0)
        return out


def _broader(width):
    """How rare so broad a feature is: one over the share of features at least as broad; 1
    where widths are not known. Hydrogen's and helium's lines are the broadest."""
    known = np.isfinite(width)
    out = np.ones(len(width))
    ranked = np.sort(width[known])
    at_least = len(ranked) - np.searchsorted(ranked, width[known], side="left")
    out[known] = len(ranked) / np.maximum(at_least, 1) if len(ranked) else 1.0
    return out


def tail_of(evidence, usable) -> float:
    """P(the sum over lines of chance evidence >= the observed sum), by convolution.

    evidence: (copies, lines), the first row observed; usable: same shape, False where a copy
    stands outside what was searched. Each line's chance distribution leans with half its
    weight on all lines'.
    """
    copies, lines = evidence.shape
    level = np.minimum(np.rint(evidence / BIN).astype(int), int(TOP / BIN))
    usable = usable.copy()
    usable[0] = True
    bins = int(TOP / BIN) + 1
    flat = (np.arange(lines)[None, :] * bins + level)[usable]
    own = np.bincount(flat, minlength=lines * bins).reshape(lines, bins).astype(float)
    pooled = own.sum(axis=0) / own.sum()
    own = 0.5 * own / own.sum(axis=1, keepdims=True) + 0.5 * pooled
    size = 1 << int(np.ceil(np.log2(lines * bins)))
    whole = np.fft.irfft(np.prod(np.fft.rfft(own, size, axis=1), axis=0), size)
    return float(np.clip(np.sum(whole[int(np.sum(level[0])) :]), 0.0, 1.0))


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
