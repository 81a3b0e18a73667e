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
from .entries import Groups, group
from .offsets import SCALE, best_offsets, detection_log_likelihood, strength_log_likelihood
from .problem import NOT_SAID, Problem, find_pairs, inside
from .unlisted import Null, learn_null

ROUNDS = 12
TAIL_SHARE, TAIL_FACTOR, TAIL_FLOOR = 0.04, 3.5, 0.02  # heavy tail of position errors
ANY_STRENGTH = 0.25  # per dex: density of strengths where nothing predicts them
STRENGTH_TAIL, STRENGTH_RANGE = 0.03, 8.0  # share and width (dex) of strengths gone wrong
DOUBT_A_PERSON = 1e-6  # factor on the null of a feature that a person has named
OWN_PLACE = 0.1  # least weight of a line's own place against its blend's centroid
LIST_SCATTER = 0.002  # Angstrom: position scatter of a species' lines before it is learned
SCATTER_WEIGHT, SCATTER_REACH = 6.0, 0.06  # lines that prior is worth; Angstrom
CENTRING = 0.03  # of the FWHM: asymmetries and blends limit any centroid


@dataclass(frozen=True, eq=False)
class State:
    """What has been learned so far."""

    detection: tuple[DetectionCurve, ...]
    relation: tuple[StrengthRelation, ...]
    null: Null
    offsets: np.ndarray
    offset_errors: np.ndarray
    error_scale: np.ndarray
    scatter: np.ndarray


@dataclass(frozen=True, eq=False)
class Solution:
    """Marginals over the pairs with the learned state.

    feature, entry: (p,) the pairs; probability: (p,); unlisted: (f,); missing: per entry;
    offset_sigma, sigma: (p,) position offset in sigma, and that sigma in Angstrom; groups: shares per entry;
    strength: (n,) predicted strengths with species offsets
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


def solve_mixture(problem: Problem, rounds: int = ROUNDS, progress=None) -> Solution:
    """Run the engine; an empty problem gives an empty solution."""
    state = _first_state(problem)
    pairs = _Pairs(problem, state)
    for turn in range(rounds):
        if progress is not None:
            progress.report("weighing claims", turn / rounds)
        step = _expect(problem, pairs, state)
        state = _learn(problem, pairs, step, state, turn)
    return _finish(problem, pairs, _expect(problem, pairs, state), state)


def _first_state(problem: Problem) -> State:
    f = problem.features
    curves = tuple(threshold_form(0.9, 0.0) for _ in range(problem.populations))
    relations = tuple(first_relation(f.strength) for _ in range(problem.populations))
    null = learn_null(f, np.full(len(f), 0.1), problem.length(), problem.complete)
    zero = np.zeros(problem.species)
    return State(curves, relations, null, zero, zero + 0.4, np.ones(2), zero + LIST_SCATTER)


class _Pairs:
    """Pairs and everything about them that stays fixed over the rounds."""

    def __init__(self, problem: Problem, state: State):
        f, e = problem.features, problem.entries
        self.base = np.sqrt(
            f.error**2 + (CENTRING * np.nan_to_num(f.fwhm)) ** 2 + f.excess**2
        )
        reach = 3.5 * np.maximum(TAIL_FACTOR * 1.5 * self.base, TAIL_FLOOR)
        self.feature, self.entry = find_pairs(f, e, np.minimum(reach, 12 * self.base + 0.25))
        self.covered = inside(e.wave, problem.coverage).astype(float)
        self.m = f.strength[self.feature]


@dataclass(frozen=True, eq=False)
class _Step:
    groups: Groups
    strength: np.ndarray
    marginals: Marginals
    sigma: np.ndarray
    offset: np.ndarray
    log_likelihood: float


def _expect(problem: Problem, pairs: _Pairs, state: State) -> _Step:
    e, f = problem.entries, problem.features
    strength = e.strength + state.offsets[e.species]
    groups = group(e.wave, strength, e.population, problem.group_half_width)
    shows = _per_population(e.population, groups.total, state.detection) * groups.share
    position, sigma, offset = _position(problem, pairs, state, groups)
    density, p0 = state.null.at(f.sign, f.strength)
    strengths = _strength_likelihood(problem, pairs, state, groups, p0)
    likelihood = shows[pairs.entry] * position * strengths
    absent = 1.0 - shows[pairs.entry] * pairs.covered[pairs.entry] if problem.complete else 1.0
    density, likelihood = _as_said(problem, pairs, density, likelihood)
    odds = likelihood / (absent * (density * p0)[pairs.feature])
    marginals = associate(pairs.feature, pairs.entry, odds, (len(f), len(e)))
    total = np.bincount(pairs.feature, likelihood, len(f)) + density * p0
    value = float(np.sum(np.log(total))) - float(np.sum(shows * pairs.covered))
    return _Step(groups, strength, marginals, sigma, offset, value)


def _as_said(problem: Problem, pairs: _Pairs, density, likelihood):
    """A person's word is data: a feature they named has no other source, one they set aside
    has none in the list."""
    if problem.said is None:
        return density, likelihood
    block = problem.species // problem.populations
    said = problem.said[pairs.feature]
    name = problem.entries.species[pairs.entry] % block
    allowed = (said == NOT_SAID) | (said == name)
    return np.where(problem.said >= 0, density * DOUBT_A_PERSON, density), likelihood * allowed


def _per_population(population, value, curves):
    out = np.zeros(len(value))
    for k, curve in enumerate(curves):
        here = population == k
        if np.any(here):
            out[here] = curve(value[here])
    return out


def _position(problem, pairs, state, groups):
    """Position likelihood per pair: the line's own place, or its blend's centroid."""
    e, f = problem.entries, problem.features
    list_error = np.hypot(e.error, state.scatter[e.species])
    scale = state.error_scale[f.crowded.astype(int)]
    sigma = np.hypot((pairs.base * scale)[pairs.feature], list_error[pairs.entry])
    x = f.wave[pairs.feature]
    own = x - e.wave[pairs.entry]
    blend = x - groups.centroid[pairs.entry]
    weight = np.maximum(groups.share[pairs.entry], OWN_PLACE)
    value = weight * _tailed(own, sigma) + (1 - weight) * _tailed(blend, sigma)
    nearer = np.where(np.abs(blend) < np.abs(own), blend, own)
    return value, sigma, nearer / sigma


def _tailed(offset, sigma):
    wide = np.maximum(TAIL_FACTOR * sigma, TAIL_FLOOR)
    return (1 - TAIL_SHARE) * _normal(offset, sigma) + TAIL_SHARE * _normal(offset, wide)


def _normal(x, s):
    return np.exp(-0.5 * (x / s) ** 2) / (s * np.sqrt(2 * np.pi))


def _strength_likelihood(problem, pairs, state, groups, p0):
    """Density of the measured strength given the line's group; flat where strengths are not
    predicted, the null's own (no evidence) where none was measured."""
    e = problem.entries
    total, value = groups.total[pairs.entry], p0[pairs.feature].copy()
    error = problem.features.strength_err[pairs.feature]
    for k, relation in enumerate(state.relation):
        if k in problem.ungraded:
            value[(e.population[pairs.entry] == k) & np.isfinite(pairs.m)] = ANY_STRENGTH
            continue
        here = (e.population[pairs.entry] == k) & np.isfinite(pairs.m)
        s = np.hypot(relation.scatter, np.nan_to_num(error[here]))
        z = pairs.m[here] - relation(total[here])
        value[here] = (1 - STRENGTH_TAIL) * _normal(z, s) + STRENGTH_TAIL / STRENGTH_RANGE
    return value


def _learn(problem, pairs, step: _Step, state: State, turn: int) -> State:
    e, f = problem.entries, problem.features
    p = step.marginals.pair
    seen = np.bincount(pairs.entry, p, len(e))
    exposure = np.maximum(step.groups.share * pairs.covered, seen)
    detection, relation = list(state.detection), list(state.relation)
    total = step.groups.total
    for k in range(problem.populations):
        here = (e.population == k) & (pairs.covered > 0)
        features = float(np.sum(seen[here]))
        detection[k] = learn_detection(total[here], seen[here], exposure[here], features)
        mine = e.population[pairs.entry] == k
        relation[k] = learn_relation(
            total[pairs.entry[mine]], pairs.m[mine], p[mine], relation[k]
        )
    state = replace(
        state,
        detection=tuple(detection),
        relation=tuple(relation),
        null=learn_null(f, step.marginals.unlisted, problem.length(), problem.complete),
        error_scale=np.array(
            [_error_scale(step, f.crowded[pairs.feature] == k, state.error_scale[k]) for k in (0, 1)]
        ),
        scatter=_species_scatter(problem, pairs, step),
    )
    return _learn_offsets(problem, pairs, step, state) if turn >= 1 else state


def _error_scale(step: _Step, which, previous: float) -> float:
    """Robust scale of likely offsets (clean or crowded features) in their present sigma."""
    sure = (step.marginals.pair > 0.7) & which
    if np.sum(sure) < 15:
        return previous
    scale = 1.4826 * float(np.median(np.abs(step.offset[sure])))
    return float(np.clip(previous * scale, 0.5, 4.0))


def _species_scatter(problem, pairs, step: _Step):
    """Position scatter (Angstrom) of each species' lines beyond that of the features.

    Hyperfine structure and poor lists scatter some species more than others.
    """
    e = problem.entries
    offset = step.offset * step.sigma
    mine = (step.marginals.pair > 0.5) & (np.abs(offset) < SCATTER_REACH)
    feature = pairs.base[pairs.feature[mine]] * 0.8
    excess = offset[mine] ** 2 - feature**2 - e.error[pairs.entry[mine]] ** 2
    species, weight = e.species[pairs.entry[mine]], step.marginals.pair[mine]
    total = np.bincount(species, weight * excess, problem.species)
    count = np.bincount(species, weight, problem.species)
    variance = (SCATTER_WEIGHT * LIST_SCATTER**2 + total) / (SCATTER_WEIGHT + count)
    return np.sqrt(np.clip(variance, 0.0005**2, 0.03**2))


def _learn_offsets(problem, pairs, step: _Step, state: State) -> State:
    """Each population's species have a block of indices of their own."""
    block = problem.species // problem.populations
    mean, error = np.zeros(problem.species), np.full(problem.species, SCALE)
    p = step.marginals.pair
    seen = np.bincount(pairs.entry, p, len(problem.entries))
    for k in np.unique(problem.entries.population):
        table = _offset_evidence(problem, pairs, step, state, (int(k), block, seen))
        mine = slice(k * block, (k + 1) * block)
        mean[mine], error[mine] = best_offsets(table)
    return replace(state, offsets=mean, offset_errors=error)


def _offset_evidence(problem, pairs, step: _Step, state: State, which):
    """Log-likelihood of the offsets of one population's species.

    which: (population, species per population, P(seen) per entry).
    """
    k, block, seen = which
    e, p, share = problem.entries, step.marginals.pair, step.groups.share
    here = np.nonzero(e.population == k)[0]
    exposure = share * pairs.covered if problem.complete else seen
    table = detection_log_likelihood(
        e.strength[here],
        (seen * share)[here],
        (exposure * share)[here],
        e.species[here] - k * block,
        block,
        state.detection[k],
    )
    if k in problem.ungraded:
        return table
    mine = (e.population[pairs.entry] == k) & np.isfinite(pairs.m) & (p > 0.05)
    who, relation = pairs.entry[mine], state.relation[k]
    return table + strength_log_likelihood(
        pairs.m[mine] - relation(e.strength[who]),
        relation.slope(step.strength[who]),
        max(relation.scatter, 0.2),
        p[mine] * share[who],
        e.species[who] - k * block,
        block,
    )


def _finish(problem, pairs, step: _Step, state: State) -> Solution:
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
        step.log_likelihood,
    )
