"""The self-calibrating mixture: which predicted line made which feature.

Everything uncertain is learned from the spectrum itself by expectation-maximisation: how
often lines show, how strong they look, how dense unlisted features are, how far each
species is off its predicted strengths, and how good the positions are.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from .association import Marginals, associate
from .curves import DetectionCurve, StrengthRelation, learn_detection, learn_relation
from .curves import first_relation, threshold_form
from .entries import Groups
from .hidden import absence, share_above
from .pairs import TAIL_FACTOR, TAIL_FLOOR, Pairs
from .problem import NOT_SAID, Problem
from .populations import STELLAR
from .species_offsets import OwnOffsets, learn_offsets
from .strength_errors import FIRST_SPREAD, learn_spread, strength_errors
from .stretches import by_stretch
from .unlisted import Null, learn_null

ROUNDS = 12
SETTLED = 1e-3  # rms change of probability per feature and round
TAIL_SHARE = 0.04  # of the heavy tail of position errors
ANY_STRENGTH = 0.25  # per dex: density of strengths where nothing predicts them
STRENGTH_TAIL, STRENGTH_RANGE = 0.03, 8.0  # share and width (dex) of strengths gone wrong
DOUBT_A_PERSON = 1e-6  # factor on the null of a feature that a person has named
OWN_PLACE = 0.1  # least weight of a line's own place against its blend's centroid in a crowd
LIST_SCATTER = 0.002  # Angstrom: position scatter of a species' lines before it is learned
UNLIKELY, LIKELY = 0.4, 0.6  # pairs between them count in part: none jumps in or out
SCATTER_WEIGHT, SCATTER_REACH = 6.0, 0.06  # lines that prior is worth; Angstrom


@dataclass(frozen=True, eq=False)
class State:
    """What has been learned so far.

    spread: error of the star's predicted strengths beyond that of log gf, dex; above: chance
    that something unlisted is stronger than its line of a strength, at curves.CENTRES
    """

    detection: tuple[DetectionCurve, ...]
    relation: tuple[StrengthRelation, ...]
    null: Null
    offsets: np.ndarray
    offset_errors: np.ndarray
    error_scale: np.ndarray
    scatter: np.ndarray
    spread: float = FIRST_SPREAD
    above: np.ndarray | None = None
    own: OwnOffsets | None = None


@dataclass(frozen=True, eq=False)
class Solution:
    """Marginals over the pairs with the learned state.

    feature, entry: (p,) the pairs; probability: (p,); unlisted: (f,); missing: per entry;
    offset_sigma, sigma: (p,) position offset in sigma, and that sigma in Angstrom; groups: shares per entry;
    strength: (n,) predicted strengths with species offsets; between: (p,) ln of what weighing
    star against air did to the odds, None where nothing was weighed
    pairs: what of the pairs stays fixed; odds, message: (p,) as of ``associate``
    stretches: parts of ``log_likelihood`` by wavelength, as of ``by_stretch``
    """

    problem: Problem
    feature: np.ndarray
    entry: np.ndarray
    probability: np.ndarray
    unlisted: np.ndarray
    missing: np.ndarray
    offset_sigma: np.ndarray
    sigma: np.ndarray
    groups: Groups
    strength: np.ndarray
    state: State
    log_likelihood: float
    pairs: Pairs
    odds: np.ndarray
    message: np.ndarray
    between: np.ndarray | None = None
    stretches: np.ndarray | None = None

    def of(self, features) -> Solution:
        """The same with the pairs of these features alone; features: (k,) indices."""
        wanted = np.zeros(len(self.unlisted), dtype=bool)
        wanted[features] = True
        which = np.nonzero(wanted[self.feature])[0]
        columns = ("feature", "entry", "probability", "offset_sigma", "sigma", "odds", "message",
                   "between")  # fmt: skip
        part = {name: getattr(self, name) for name in columns}
        part = {name: None if c is None else c[which] for name, c in part.items()}
        return replace(self, pairs=self.pairs.only(self.problem, which), **part)


def solve_mixture(
    problem: Problem, rounds: int = ROUNDS, progress=None, start: State | None = None
) -> Solution:
    """Run the engine; an empty problem gives an empty solution.

    rounds: at most so many; it ends before when the claims have settled. start: what was
    learned on a problem of the same features and species, to go on from.
    """
    pairs = Pairs(problem)
    state, warm = (_first_state(problem, pairs), 0) if start is None else (start, 1)
    state = replace(state, own=None)  # rows of another problem
    step = _expect(problem, pairs, state)
    for turn in range(rounds):
        if progress is not None:
            progress.report("weighing claims", turn / rounds)
        before = step.marginals
        state = _learn(problem, pairs, step, state, turn + warm)
        step = _expect(problem, pairs, state, before.message)
        if _settled(before.pair, step.marginals.pair, len(problem.features)):
            break
    return _finish(problem, pairs, step, state)


def _settled(before, after, features: int) -> bool:
    """Whether a round moved so little probability that more would change no claim."""
    moved = float(np.sum((after - before) ** 2))
    return moved < SETTLED**2 * max(features, 1)


def _first_state(problem: Problem, pairs: Pairs) -> State:
    f = problem.features
    curves = tuple(threshold_form(0.9, 0.0) for _ in range(problem.populations))
    relations = tuple(first_relation(f.strength) for _ in range(problem.populations))
    null = learn_null(pairs.bins, np.full(len(f), 0.1), problem.length(), problem.complete)
    zero = np.zeros(problem.species)
    return State(curves, relations, null, zero, zero + 0.4, np.ones(2), zero + LIST_SCATTER)


@dataclass(frozen=True, eq=False)
class Step:
    """Marginals of a round and what they were made of."""

    groups: Groups
    strength: np.ndarray
    marginals: Marginals
    sigma: np.ndarray
    offset: np.ndarray
    odds: np.ndarray
    stretches: np.ndarray


@dataclass(frozen=True, eq=False)
class Odds:
    """value: (p,) odds as of ``associate``; likelihood: (p,) of the pairs, null: (f,) of an
    unlisted line, both as densities; shows: (n,); sigma, offset: (p,) as of ``Solution``."""

    value: np.ndarray
    likelihood: np.ndarray
    null: np.ndarray
    shows: np.ndarray
    sigma: np.ndarray
    offset: np.ndarray


def _expect(problem: Problem, pairs: Pairs, state: State, message=None) -> Step:
    """Marginals in the present state; message: of the association before, to go on from."""
    e, f = problem.entries, problem.features
    strength = offset_strengths(problem, state)
    groups = pairs.near.groups(strength, strength_errors(problem, state))
    odds = pair_odds(problem, pairs, state, groups)
    marginals = associate(pairs.feature, pairs.entry, odds.value, (len(f), len(e)), message)
    total = np.bincount(pairs.feature, odds.likelihood, len(f)) + odds.null
    value = by_stretch(f.wave, e.wave, np.log(total), odds.shows * pairs.covered)
    return Step(groups, strength, marginals, odds.sigma, odds.offset, odds.value, value)


def pair_odds(problem: Problem, pairs: Pairs, state: State, groups: Groups) -> Odds:
    """Odds that each line made the feature against line and feature being unrelated."""
    shows = chance_to_show(pairs, groups, state)
    position, sigma, offset = position_likelihood(pairs, state, groups)
    density, p0 = state.null.at(pairs.bins)
    density = density if problem.crowd is None else density * problem.crowd
    shown = shows[pairs.entry]
    likelihood = shown * position * strength_likelihood(pairs, state, groups, p0)
    absent = absence(problem, pairs, state, groups, shown)
    density, likelihood = _as_said(problem, pairs, density, likelihood)
    value = likelihood / (absent * (density * p0)[pairs.feature])
    return Odds(value, likelihood, density * p0, shows, sigma, offset)


def offset_strengths(problem: Problem, state: State):
    """Predicted strengths (n,) with what the other lines of each species say, dex."""
    strength = problem.entries.strength + state.offsets[problem.entries.species]
    if state.own is not None:
        rows = state.own.entries
        strength[rows] = problem.entries.strength[rows] + state.own.offset
    return strength


def _as_said(problem: Problem, pairs: Pairs, density, likelihood):
    """A person's word is data: a feature they named has no other source, one they set aside
    has none in the list."""
    if problem.said is None:
        return density, likelihood
    block = problem.species // problem.populations
    said = problem.said[pairs.feature]
    name = problem.entries.species[pairs.entry] % block
    allowed = (said == NOT_SAID) | (said == name)
    return np.where(problem.said >= 0, density * DOUBT_A_PERSON, density), likelihood * allowed


def chance_to_show(pairs: Pairs, groups: Groups, state: State):
    """P(the entry makes a feature)."""
    out = np.zeros(len(groups.share))
    for block in pairs.blocks:
        out[block.entries] = state.detection[block.population](groups.total[block.entries])
    return out * groups.first


def position_likelihood(pairs: Pairs, state: State, groups: Groups):
    """Position likelihood per pair: the line's own place, or its blend's centroid."""
    scale = state.error_scale[pairs.crowded]
    listed = pairs.line_variance + state.scatter[pairs.species] ** 2
    sigma = np.sqrt(pairs.base_variance * scale**2 + listed)
    value, nearer = tailed(pairs.own, sigma), pairs.own.copy()
    weight = own_place(pairs, groups)
    mixed = np.nonzero(weight < 1.0)[0]
    blend = pairs.wave[mixed] - groups.centroid[pairs.entry[mixed]]
    weight = weight[mixed]
    value[mixed] = weight * value[mixed] + (1 - weight) * tailed(blend, sigma[mixed])
    nearer[mixed] = np.where(np.abs(blend) < np.abs(nearer[mixed]), blend, nearer[mixed])
    return value, sigma, nearer / sigma


def own_place(pairs: Pairs, groups: Groups):
    """Weight of each pair's line's own place against its blend's centroid, 0-1.

    The line's part of the blend if it is the main one, as its chance to show assumes. Where
    neighbours disturb the centroid the place says less of who is the main one: there the
    predicted share.
    """
    share, lead = groups.share[pairs.entry], groups.lead[pairs.entry]
    shared = (pairs.crowded > 0) & (share < 1.0)
    return np.where(shared, np.maximum(share, OWN_PLACE), lead)


def tailed(offset, sigma):
    wide = np.maximum(TAIL_FACTOR * sigma, TAIL_FLOOR)
    return (1 - TAIL_SHARE) * _normal(offset, sigma) + TAIL_SHARE * _normal(offset, wide)


def _normal(x, s):
    z = x / s
    return np.exp(-0.5 * z * z) / (s * np.sqrt(2 * np.pi))


def strength_likelihood(pairs: Pairs, state: State, groups: Groups, p0):
    """Density of the measured strength given the line's group; flat where strengths are not
    predicted, the null's own (no evidence) where none was measured."""
    value = np.where(np.isfinite(pairs.m), ANY_STRENGTH, p0[pairs.feature])
    for block in pairs.blocks:
        relation, rows = state.relation[block.population], block.graded
        if len(rows) == 0:
            continue
        expected = relation(groups.total[pairs.entry[rows]])
        s = np.sqrt(relation.scatter**2 + pairs.m_variance[rows])
        likely = _normal(pairs.m[rows] - expected, s)
        value[rows] = (1 - STRENGTH_TAIL) * likely + STRENGTH_TAIL / STRENGTH_RANGE
    return value


def _learn(problem: Problem, pairs: Pairs, step: Step, state: State, turn: int) -> State:
    p, total = step.marginals.pair, step.groups.total
    seen = np.bincount(pairs.entry, p, len(problem.entries))
    exposure = np.maximum(step.groups.first * pairs.covered, seen)
    detection, relation = list(state.detection), list(state.relation)
    for block in pairs.blocks:
        k, here, mine = block.population, block.entries[block.covered], block.graded
        features = float(np.sum(seen[here]))
        detection[k] = learn_detection(total[here], seen[here], exposure[here], features)
        relation[k] = learn_relation(
            total[pairs.entry[mine]], pairs.m[mine], p[mine], relation[k]
        )
    spread, above = state.spread, state.above
    for block in pairs.blocks:
        if block.population == STELLAR:
            curves, here = (detection[STELLAR], relation[STELLAR]), block.entries[block.covered]
            spread = learn_spread(problem, pairs, step, (block, *curves))
            above = share_above(total[here], seen[here])
    scale = [_error_scale(step, pairs.crowded == k, state.error_scale[k]) for k in (0, 1)]
    state = replace(
        state,
        detection=tuple(detection),
        relation=tuple(relation),
        null=learn_null(
            pairs.bins, step.marginals.unlisted, problem.length(), problem.complete
        ),
        error_scale=np.array(scale),
        scatter=species_scatter(problem, pairs, step),
        spread=spread,
        above=above,
    )
    return learn_offsets(problem, pairs, step, state) if turn >= 1 else state


def _error_scale(step: Step, which, previous: float) -> float:
    """Robust scale of likely offsets (clean or crowded features) in their present sigma."""
    sure = (step.marginals.pair > 0.7) & which
    if np.sum(sure) < 15:
        return previous
    scale = 1.4826 * float(np.median(np.abs(step.offset[sure])))
    return float(np.clip(previous * scale, 0.5, 4.0))


def species_scatter(problem: Problem, pairs: Pairs, step: Step):
    """Position scatter (Angstrom) of each species' lines beyond that of the features.

    Hyperfine structure and poor lists scatter some species more than others.
    """
    p = step.marginals.pair
    likely = np.nonzero(p > UNLIKELY)[0]
    offset = step.offset[likely] * step.sigma[likely]
    near = np.abs(offset) < SCATTER_REACH
    mine, offset = likely[near], offset[near]
    feature = pairs.base[pairs.feature[mine]] * 0.8
    excess = offset**2 - feature**2 - pairs.line_variance[mine]
    counts = np.clip((p[mine] - UNLIKELY) / (LIKELY - UNLIKELY), 0.0, 1.0)
    species, weight = pairs.species[mine], p[mine] * counts
    total = np.bincount(species, weight * excess, problem.species)
    count = np.bincount(species, weight, problem.species)
    variance = (SCATTER_WEIGHT * LIST_SCATTER**2 + total) / (SCATTER_WEIGHT + count)
    return np.sqrt(np.clip(variance, 0.0005**2, 0.03**2))


def _finish(problem, pairs, step: Step, state: State) -> Solution:
    return Solution(
        problem,
        pairs.feature,
        pairs.entry,
        step.marginals.pair,
        step.marginals.unlisted,
        step.marginals.missing,
        step.offset,
        step.sigma,
        step.groups,
        step.strength,
        state,
        float(np.sum(step.stretches)),
        pairs,
        step.odds,
        step.marginals.message,
        stretches=step.stretches,
    )
