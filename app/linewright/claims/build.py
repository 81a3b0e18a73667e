"""Claims out of the mixture's marginals: species posteriors, candidates, blends."""

from __future__ import annotations

import numpy as np

from .breakdown import breakdowns
from .model import Candidate, Claim, standing_of
from .entries import SHARE_EXPONENT
from .mixture import Solution
from .populations import SIGNS, UNGRADED

KEPT = 6  # candidates kept per feature
BLEND_SHARE = 0.2  # contributors of at least this share are listed
LONE_SHARE = 0.7  # a group whose top share is below this is a blend


def species_posteriors(solution: Solution, names):
    """Per pair: P(the pair's species made the feature), summed over its lines.

    names: (n_entries,) species name index of each entry.
    """
    key = solution.feature.astype(np.int64) * (int(names.max(initial=0)) + 1)
    key = key + names[solution.entry]
    unique, inverse = np.unique(key, return_inverse=True)
    return np.bincount(inverse, solution.probability, len(unique))[inverse]


def build_claims(solution: Solution, catalogue, components, rows=None) -> tuple[Claim, ...]:
    """One claim per feature, in feature order; rows: of these features only, (k,) indices."""
    if rows is not None:
        solution = solution.of(rows)
    species_p = species_posteriors(solution, catalogue.species[solution.problem.entries.row])
    order = np.lexsort((-solution.probability, -species_p, solution.feature))
    sure = _certainty(solution, components)
    kept = order[_diverse(solution, catalogue, order)]
    candidates = _candidates(solution, catalogue, components, (kept, sure))
    count = len(solution.problem.features)
    bounds = np.searchsorted(solution.feature[kept], np.arange(count + 1))
    best = kept[bounds[:-1][bounds[1:] > bounds[:-1]]]
    blends = dict(zip(solution.feature[best].tolist(), _blends(solution, catalogue, best)))
    probability = dict(
        zip(solution.feature[best].tolist(), np.minimum(species_p[best], 1.0).tolist())
    )
    unlisted = (1.0 - (1.0 - solution.unlisted) * sure).tolist()
    bounds, sure = bounds.tolist(), sure.tolist()
    return tuple(
        _claim(
            candidates[bounds[i] : bounds[i + 1]],
            probability[i] * sure[i],
            unlisted[i],
            blends[i],
        )
        if i in blends
        else Claim(p_unlisted=1.0)
        for i in (range(count) if rows is None else rows)
    )


def _claim(candidates, probability: float, unlisted: float, blend) -> Claim:
    best = candidates[0]
    others = (c.species for c in candidates if c.species != best.species)
    return Claim(
        species=best.species,
        probability=probability,
        p_line=min(best.probability, 1.0),
        p_unlisted=unlisted,
        standing=standing_of(probability),
        origin=best.origin,
        candidates=candidates,
        blend=blend,
        runner_up=next(others, ""),
    )


def _predicted_depths(solution: Solution, entries):
    """Central depth the learned relation predicts for the group of each of these entries; NaN
    where the population's depths are not predicted or no depth was measured."""
    population, total = solution.problem.entries.population[entries], solution.groups.total[entries]
    depth = np.full(len(entries), np.nan)
    if not np.any(np.isfinite(solution.problem.features.strength)):
        return depth
    for k, relation in enumerate(solution.state.relation):
        if k not in UNGRADED and SIGNS[k] > 0:
            here = population == k
            depth[here] = 1.0 / (1.0 + 10.0 ** (-relation(total[here])))
    return depth


def _diverse(solution: Solution, catalogue, order):
    """Positions in ``order`` (pairs ranked within each feature) of the best lines, at most two
    of a species, so that rivals stay visible."""
    feature = solution.feature[order].astype(np.int64)
    name = catalogue.species[solution.problem.entries.row[solution.entry[order]]]
    key = feature * (int(name.max(initial=0)) + 1) + name
    chosen = np.nonzero(_rank_within(key) < 2)[0]
    return chosen[_rank_within(feature[chosen]) < KEPT]


def _rank_within(key):
    """Running number (from 0) of each row among the rows of its key, in row order."""
    order = np.argsort(key, kind="stable")
    ranked = key[order]
    start = np.nonzero(np.concatenate(([True], ranked[1:] != ranked[:-1])))[0]
    size = np.diff(np.concatenate((start, [len(key)])))
    out = np.empty(len(key), dtype=np.int64)
    out[order] = np.arange(len(key)) - np.repeat(start, size)
    return out


def _certainty(solution: Solution, components):
    """Certainty (f,) of the components behind each feature's pairs, weighted by probability."""
    certain = np.array([c.certainty for c in components])
    count = len(solution.problem.features)
    if np.all(certain == 1.0):
        return np.ones(count)
    own = certain[solution.problem.entries.component[solution.entry]]
    weight = solution.probability + 1e-12
    total = np.bincount(solution.feature, weight, count)
    mean = np.bincount(solution.feature, weight * own, count) / np.where(total > 0, total, 1.0)
    return np.where(total > 0, mean, 1.0)


def _candidates(solution: Solution, catalogue, components, chosen):
    """Candidates of the chosen pairs; chosen: (pair indices, certainty per feature)."""
    pairs, sure = chosen
    e, entry = solution.problem.entries, solution.entry[pairs]
    row = e.row[entry]
    origins = [c.origin for c in components]
    owner = e.component[entry]
    velocity = _velocities(components, owner, row)
    probability = np.minimum(solution.probability[pairs], 1.0) * sure[solution.feature[pairs]]
    columns = (
        [catalogue.species_names[i] for i in catalogue.species[row].tolist()],
        [origins[i] for i in owner.tolist()],
        catalogue.wave[row].tolist(),
        catalogue.wave_err[row].tolist(),
        catalogue.e_low[row].tolist(),
        catalogue.loggf[row].tolist(),
        velocity.tolist(),
        probability.tolist(),
        solution.groups.share[entry].tolist(),
        solution.offset_sigma[pairs].tolist(),
        _predicted_depths(solution, entry).tolist(),
        [catalogue.source_keys[i] for i in catalogue.source[row].tolist()],
        breakdowns(solution, pairs),
    )
    return tuple(map(Candidate, *columns))


def _velocities(components, owner, row):
    """km/s of the components behind some lines, or of their ions where these have their own."""
    velocity = np.array([c.velocity for c in components], dtype=float)[owner]
    for i, component in enumerate(components):
        if component.ions is not None:
            mine = owner == i
            velocity[mine] += component.ions.shift[row[mine]]
    return velocity


def _blends(solution: Solution, catalogue, pairs):
    """Per pair the other lines of its line's group that carry a share of at least a fifth."""
    e, best = solution.problem.entries, solution.entry[pairs]
    half = solution.problem.group_half_width[best]
    low = np.searchsorted(e.wave, e.wave[best] - half)
    high = np.searchsorted(e.wave, e.wave[best] + half)
    owner = np.repeat(np.arange(len(best)), high - low)
    near = np.arange(len(owner)) - np.repeat(np.cumsum(high - low) - high, high - low)
    mine = best[owner]
    other = (e.population[near] == e.population[mine]) & (near != mine)
    owner, near, mine = owner[other], near[other], mine[other]
    relative = 10.0 ** (SHARE_EXPONENT * (solution.strength[near] - solution.strength[mine]))
    share = np.minimum(solution.groups.share[mine] * relative, 1.0)
    listed = np.nonzero(share >= BLEND_SHARE)[0]
    listed = listed[np.lexsort((-share[listed], owner[listed]))]
    out: list[tuple] = [()] * len(best)
    row = e.row[near[listed]]
    for i, *contributor in zip(
        owner[listed].tolist(),
        [catalogue.species_names[k] for k in catalogue.species[row].tolist()],
        catalogue.wave[row].tolist(),
        share[listed].tolist(),
    ):
        out[i] += (tuple(contributor),)
    return out
