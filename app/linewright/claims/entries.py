"""Predicted lines of every velocity component, flattened for the mixture engine."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

ABSORPTION, EMISSION = 1, -1
MIN_RESOLUTION = 0.04  # Angstrom; lines closer than this are one feature in any spectrum
RESOLUTION_SHARE = 0.45  # of the FWHM: lines closer than this are one feature
LN10 = np.log(10.0)
SHARE_EXPONENT = 1.1  # softens predicted opacities, whose log scatter is 0.2 to 0.3 dex
PROBIT = 1.702  # the logistic curve of this times x is within 0.01 of the normal integral


@dataclass(frozen=True, eq=False)
class Entries:
    """Predicted lines in the spectrum's frame, sorted by ``wave``; arrays of length n.

    wave: vacuum Angstrom where the line is expected; error: its one sigma, Angstrom
    strength: log10 predicted strength, each population on a zero point of its own
    population: index of the strength model (see populations.py)
    sign: +1 absorption, -1 emission
    species: index of the (population, species) pair for strength offsets
    component: index of the velocity component; row: catalogue row
    segment: of the spectrum; a line in overlapping segments has an entry in each
    """

    wave: np.ndarray
    error: np.ndarray
    strength: np.ndarray
    population: np.ndarray
    sign: np.ndarray
    species: np.ndarray
    component: np.ndarray
    row: np.ndarray
    segment: np.ndarray

    def __len__(self) -> int:
        return len(self.wave)

    def take(self, which) -> "Entries":
        return Entries(**{f.name: getattr(self, f.name)[which] for f in fields(self)})


def join(parts: list[Entries]) -> Entries:
    """One table out of several, sorted by wavelength (stable, so deterministic)."""
    columns = {f.name: np.concatenate([getattr(p, f.name) for p in parts]) for f in fields(Entries)}
    order = np.argsort(columns["wave"], kind="stable")
    return Entries(**{name: column[order] for name, column in columns.items()})


@dataclass(frozen=True, eq=False)
class Groups:
    """What stands within one resolution element of each entry (same population).

    share: of the softened predicted strength, 0-1
    first: chance that the entry is the strongest, by the errors of the strengths
    lead: share of the strength if the entry is the main line, at least as strong as any other
    total: log10 of the summed strength; centroid: strength-weighted wavelength, Angstrom
    """

    share: np.ndarray
    first: np.ndarray
    lead: np.ndarray
    total: np.ndarray
    centroid: np.ndarray


def group_half_width(fwhm):
    """Half width (Angstrom) within which lines make one feature, from the FWHM."""
    return np.maximum(MIN_RESOLUTION, RESOLUTION_SHARE * np.asarray(fwhm, dtype=float))


def group(wave, strength, population, half_width) -> Groups:
    """Shares, totals and centroids of lines closer than ``half_width`` (Angstrom, per entry).

    All arrays of shape (n,), ``wave`` ascending. Only lines of one population share: the
    strengths of different ones stand on different scales, and they compete as rivals.
    """
    return Neighbourhood(wave, population, half_width).groups(np.asarray(strength, dtype=float))


class Couples:
    """Every line of a crowd with every other of its resolution element: which is the main one?

    Of two lines d apart, with an error s of the difference, the first is stronger with the
    chance Phi(d/s) (elementary, for normal errors). Phi is taken as a logistic curve, whose
    heavier tails suit log gf gone wrong; of several lines each has a chance in proportion to
    its odds against the strongest.
    """

    def __init__(self, rows, crowd, first, last):
        """rows: (n,) entries; crowd: (c,) rows with neighbours rows[first:last]."""
        size = last - first
        self.start = np.cumsum(size) - size
        self.owner = np.repeat(np.arange(len(crowd)), size)
        self.near = rows[np.arange(len(self.owner)) - (self.start - first)[self.owner]]
        self.lines = rows[crowd]
        self.own = np.nonzero(self.near == self.lines[self.owner])[0]

    def first(self, strength, error):
        """Chance (c,) of the lines to be the strongest, from strengths and errors (n,), dex."""
        if len(self.lines) == 0:
            return np.zeros(0)
        near, variance = strength[self.near], error[self.near] ** 2
        behind = np.maximum.reduceat(near, self.start)[self.owner] - near
        strongest = np.nonzero(behind == 0.0)[0]
        beside = np.zeros(len(self.lines))
        beside[self.owner[strongest]] = variance[strongest]
        odds = np.exp(-PROBIT * behind / np.sqrt(variance + beside[self.owner]))
        return odds[self.own] / np.add.reduceat(odds, self.start)


class Neighbourhood:
    """Which lines stand within one resolution element of each other: found once, used at
    every change of the strengths. Arguments as of ``group``; judged: populations whose
    strengths have errors of their own, others have the usual one of SHARE_EXPONENT."""

    def __init__(self, wave, population, half_width, judged=()):
        self.wave = np.asarray(wave, dtype=float)
        self.blocks, self.couples = [], []
        for kind in np.unique(population):
            rows = np.nonzero(population == kind)[0]
            w, half = self.wave[rows], half_width[rows]
            first = np.searchsorted(w, w - half, side="left")
            last = np.searchsorted(w, w + half, side="right")
            crowd = np.nonzero(last - first > 1)[0]
            self.blocks.append((rows, crowd, first[crowd], last[crowd], half[crowd]))
            if kind in judged:
                self.couples.append(Couples(rows, crowd, first[crowd], last[crowd]))

    def groups(self, strength, error=None) -> Groups:
        """Groups at strengths (n,), log10; error: (n,) theirs, dex."""
        ones = [np.ones(len(self.wave)) for _ in range(3)]
        out = Groups(*ones, strength.copy(), self.wave.copy())
        for block in self.blocks:
            if len(block[1]):
                self._fill(out, strength, block)
        for couples in self.couples if error is not None else ():
            out.first[couples.lines] = couples.first(strength, error)
        return out

    def regrouped(self, before: Groups, strength, moved, error):
        """(groups, changed): ``before`` with the groups of entries that moved made anew, and the
        entries whose group that changed.

        strength, error: (n,) log10, dex; moved: (n,) bool, where one is no longer what
        ``before`` was made of
        """
        out = Groups(*(np.array(column) for column in vars(before).values()))
        changed = np.array(moved)
        out.total[moved] = strength[moved]
        for rows, crowd, first, last, half in self.blocks:
            near = _window(moved[rows].astype(float), first, last) > 0
            if np.any(near):
                self._fill(out, strength, (rows, crowd[near], first[near], last[near], half[near]))
                changed[rows[crowd[near]]] = True
        for couples in self.couples:
            which = changed[couples.lines]
            out.first[couples.lines[which]] = couples.first(strength, error)[which]
        return out, changed

    def _fill(self, out: Groups, strength, block) -> None:
        rows, crowd, first, last, half = block
        w, here = self.wave[rows], strength[rows]
        top = float(np.max(here))
        linear = np.exp(LN10 * (here - top))
        soft = np.exp((LN10 * SHARE_EXPONENT) * (here - top))
        soft_sum = _window(soft, first, last)
        lin_sum = np.maximum(_window(linear, first, last), linear[crowd])
        moment = _window(linear * (w - w[0]), first, last)
        chosen, place = rows[crowd], w[crowd]
        out.share[chosen] = np.clip(soft[crowd] / np.maximum(soft_sum, soft[crowd]), 0.0, 1.0)
        out.first[chosen] = out.share[chosen]
        out.total[chosen] = top + np.log10(lin_sum)
        raised = _largest(linear, first, last)
        out.lead[chosen] = raised / (np.maximum(lin_sum - linear[crowd], 0.0) + raised)
        out.centroid[chosen] = np.clip(w[0] + moment / lin_sum, place - half, place + half)


def _largest(values, first, last):
    """Largest of values[first:last] per row."""
    bounds = np.column_stack((first, last)).ravel()
    return np.maximum.reduceat(np.append(values, -np.inf), bounds)[::2]


def _window(values, first, last):
    """Sums of values[first:last] per row."""
    summed = np.concatenate(([0.0], np.cumsum(values)))
    return summed[last] - summed[first]
