"""A person's words weighed in: the mixture goes on from where it had settled without them, and
only where they tell.

While the words move little probability, what the whole spectrum taught (detection, strength
relations, unlisted lines, scale of the errors) stands. Weighed again are the features spoken
of, those that may share a line with them, and through the offsets and scatter of the species
concerned those species' other lines, their blends and rivals, until no offset moves any more.
Offsets are taken as differences from the same estimate without words, so that nothing said
changes nothing. Where the words move much, the whole mixture takes its rounds.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from .association import Marginals, associate
from .mixture import Solution, State, Step, offset_strengths, pair_odds, solve_mixture
from .mixture import species_scatter
from .offsets import SCALE
from .problem import NOT_SAID, Problem
from .species_offsets import OwnOffsets, block_offsets
from .strength_errors import strength_errors

TURNS = 10
STILL = 1e-4  # of probability: below it, summed over a species' lines, no offset is learned anew
LEAST_DEX, LEAST_SCATTER = 1e-3, 1e-3  # dex; share of the scatter: smaller changes tell nothing
MUCH = 0.005  # of the features: more probability moved, and the whole mixture goes on
ROUNDS = 6  # then, at most


class Settled:
    """A solution without words, and what words need to change it.

    start: the state from which its last rounds went, at most ROUNDS
    """

    def __init__(self, solution: Solution, start: State):
        self.solution, self.start = solution, start
        self.cluster = _clusters(solution)
        s = solution
        step = _step(s, s.probability, slice(None))
        self.learned = _Learned(s.problem, s.pairs, step, s.state)
        self.own = _own_offsets(s.state, len(s.problem.entries))

    def heeding(self, said) -> Solution:
        """The solution with a person's words; said: (f,) as of ``Problem``. What was set aside
        without them stays so unless they name it."""
        before = self.solution.problem.said
        said = np.asarray(said) if before is None else np.where(said == NOT_SAID, before, said)
        spoken = said != (NOT_SAID if before is None else before)
        if not np.any(spoken):
            return self.solution
        problem = replace(self.solution.problem, said=said)
        local = _Local(self, problem)
        touched = spoken[self.solution.feature]
        for _ in range(TURNS):
            local.weigh(np.nonzero(touched)[0])
            if local.moved() > MUCH * len(said):
                return solve_mixture(problem, ROUNDS, start=self.start)
            touched = local.learn()
            if not np.any(touched):
                break
        return local.solution()


def _clusters(s: Solution):
    """Label (p,) of the pairs: those of one label hang together by their features and lines."""
    from scipy.sparse import coo_matrix
    from scipy.sparse.csgraph import connected_components

    count = len(s.unlisted)
    size = count + len(s.missing)
    link = np.ones(len(s.feature), dtype=np.int8)
    graph = coo_matrix((link, (s.feature, count + s.entry)), shape=(size, size))
    return connected_components(graph, directed=False)[1][s.feature]


def _step(s, probability, which) -> Step:
    """A round's outcome for some pairs, as the offsets are learned from it."""
    none = np.zeros(0)
    marginals = Marginals(probability[which], none, none, none)
    return Step(s.groups, s.strength, marginals, s.sigma[which], s.offset_sigma[which], none, 0.0)


def _own_offsets(state: State, count: int):
    """Offset (count,) of the entries that have one of their own, NaN of others."""
    out = np.full(count, np.nan)
    if state.own is not None:
        out[state.own.entries] = state.own.offset
    return out


class _Learned:
    """Offsets and scatter by species and offsets by line, zero points still in them."""

    def __init__(self, problem: Problem, pairs, step: Step, state: State):
        count = len(problem.entries)
        self.offset, self.error = np.zeros(problem.species), np.full(problem.species, SCALE)
        self.own = np.full(count, np.nan)
        seen = np.bincount(pairs.entry, step.marginals.pair, count)
        for block in pairs.blocks:
            which = (block, seen)
            offset, error, rows, own = block_offsets(problem, pairs, step, state, which)
            self.offset[block.species], self.error[block.species] = offset, error
            self.own[rows] = own
        self.variance = species_scatter(problem, pairs, step) ** 2


class _Local:
    """A solution on its way from the settled one."""

    def __init__(self, settled: Settled, problem: Problem):
        s = settled.solution
        self.settled, self.problem, self.pairs = settled, problem, s.pairs
        self.state, self.groups = s.state, s.groups
        self.strength, self.scatter = np.array(s.strength), np.array(s.state.scatter)
        self.error = strength_errors(problem, s.state)
        self.odds, self.probability = np.array(s.odds), np.array(s.probability)
        self.sigma, self.offset_sigma = np.array(s.sigma), np.array(s.offset_sigma)
        self.message, self.unlisted = np.array(s.message), np.array(s.unlisted)

    def weigh(self, touched) -> None:
        """Marginals anew where these pairs' odds count; touched: indices."""
        part = self.pairs.only(self.problem, touched)
        odds = pair_odds(self.problem, part, self.state, self.groups)
        self.odds[touched], self.sigma[touched] = odds.value, odds.sigma
        self.offset_sigma[touched] = odds.offset
        cluster, pairs = self.settled.cluster, self.pairs
        reached = np.zeros(int(cluster.max(initial=0)) + 1, dtype=bool)
        reached[cluster[touched]] = True
        here = np.nonzero(reached[cluster])[0]
        size = (len(self.unlisted), len(self.problem.entries))
        feature = pairs.feature[here]
        marginals = associate(
            feature, pairs.entry[here], self.odds[here], size, self.message[here]
        )
        self.probability[here], self.message[here] = marginals.pair, marginals.message
        self.unlisted[feature] = marginals.unlisted[feature]

    def moved(self) -> float:
        """Probability that the words moved so far."""
        return float(np.sum(np.abs(self.unlisted - self.settled.solution.unlisted))) + float(
            np.sum(np.abs(self.probability - self.settled.solution.probability))
        )

    def learn(self):
        """Offsets and scatter of the species concerned; True for pairs (p,) that feel it."""
        base, species = self.settled.solution, self.problem.species
        away = np.abs(self.probability - base.probability)
        concerned = np.bincount(self.pairs.species, away, species) > STILL
        which = np.nonzero(concerned[self.pairs.species])[0]
        entries = np.nonzero(concerned[self.problem.entries.species])[0]
        part = self.pairs.only(self.problem, which, entries)
        step = _step(self, self.probability, which)
        new = _Learned(self.problem, part, step, self.state)
        self.state = self._state(new, concerned, entries)
        return self._felt(concerned)

    def _state(self, new: _Learned, concerned, entries) -> State:
        """The settled state with what the concerned species' offsets and scatter differ by."""
        base, first = self.settled.solution.state, self.settled.learned
        drift = first.offset - base.offsets  # zero point, and what was not quite settled
        offsets = np.where(concerned, new.offset - drift, base.offsets)
        errors = base.offset_errors + np.where(concerned, new.error - first.error, 0.0)
        own = np.array(self.settled.own)
        line_drift = first.own[entries] - own[entries]
        away = np.where(
            np.isfinite(line_drift), line_drift, drift[self.problem.entries.species[entries]]
        )
        own[entries] = new.own[entries] - away
        rows = np.nonzero(np.isfinite(own))[0]
        variance = base.scatter**2 + np.where(concerned, new.variance - first.variance, 0.0)
        scatter = np.where(concerned, np.sqrt(np.maximum(variance, 0.0005**2)), base.scatter)
        far = np.abs(scatter - self.scatter) > LEAST_SCATTER * self.scatter
        return replace(
            base,
            offsets=offsets,
            offset_errors=errors,
            own=OwnOffsets(rows, own[rows]),
            scatter=np.where(far, scatter, self.scatter),
        )

    def _felt(self, concerned):
        strength = offset_strengths(self.problem, self.state)
        error = strength_errors(self.problem, self.state)
        moved = np.abs(strength - self.strength) > LEAST_DEX
        moved |= np.abs(error - self.error) > LEAST_DEX
        wider = self.state.scatter != self.scatter
        self.scatter = self.state.scatter
        felt = wider[self.pairs.species]
        if np.any(moved):
            self.strength[moved], self.error[moved] = strength[moved], error[moved]
            self.groups, changed = self.pairs.near.regrouped(
                self.groups, self.strength, moved, self.error
            )
            felt = felt | changed[self.pairs.entry]
        return felt

    def solution(self) -> Solution:
        found = np.bincount(self.pairs.entry, self.probability, len(self.problem.entries))
        names = ("groups", "strength", "state", "odds", "probability", "sigma", "offset_sigma",
                 "message", "unlisted")  # fmt: skip
        return replace(
            self.settled.solution,
            problem=self.problem,
            missing=np.clip(1.0 - found, 0.0, 1.0),
            **{name: getattr(self, name) for name in names},
        )
