"""Claims out of the mixture's marginals: species posteriors, candidates, blends."""

from __future__ import annotations

import numpy as np

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


def build_claims(solution: Solution, catalogue, components) -> tuple[Claim, ...]:
    """One claim per feature, in feature order."""
    e = solution.problem.entries
    names = catalogue.species[e.row]
    species_p = species_posteriors(solution, names)
    order = np.lexsort((-solution.probability, solution.feature))
    count = len(solution.problem.features)
    starts = np.searchsorted(solution.feature[order], np.arange(count + 1))
    builder = _Builder(solution, catalogue, components, species_p)
    return tuple(
        builder.claim(i, order[starts[i] : starts[i + 1]]) for i in range(count)
    )


def _predicted_depths(solution: Solution):
    """Central depth the learned relation predicts for each entry's group; NaN where the
    population's depths are not predicted or no depth was measured."""
    e = solution.problem.entries
    depth = np.full(len(e), np.nan)
    if not np.any(np.isfinite(solution.problem.features.strength)):
        return depth
    for k, relation in enumerate(solution.state.relation):
        if k not in UNGRADED and SIGNS[k] > 0:
            here = e.population == k
            depth[here] = 1.0 / (1.0 + 10.0 ** (-relation(solution.groups.total[here])))
    return depth


class _Builder:
    """Turns the sorted pairs of one feature into its claim."""

    def __init__(self, solution: Solution, catalogue, components, species_p):
        self.s, self.catalogue, self.components = solution, catalogue, components
        self.species_p = species_p
        self.certainty = np.array([c.certainty for c in components])
        self.depth = _predicted_depths(solution)

    def claim(self, feature: int, pairs) -> Claim:
        unlisted = float(self.s.unlisted[feature])
        sure = self._certainty(pairs)
        unlisted = 1.0 - (1.0 - unlisted) * sure
        if len(pairs) == 0:
            return Claim(p_unlisted=1.0)
        best_species = self._species(pairs[np.argmax(self.species_p[pairs])])
        ranked = sorted(pairs, key=lambda p: (-self.species_p[p], -self.s.probability[p], p))
        kept = self._diverse(ranked)
        probability = min(float(self.species_p[kept[0]]), 1.0) * sure
        candidates = tuple(self._candidate(p, sure) for p in kept)
        others = [c.species for c in candidates if c.species != best_species]
        return Claim(
            species=best_species,
            probability=probability,
            p_line=min(candidates[0].probability, 1.0),
            p_unlisted=unlisted,
            standing=standing_of(probability),
            origin=candidates[0].origin,
            candidates=candidates,
            blend=self._blend(kept[0]),
            runner_up=others[0] if others else "",
        )

    def _species(self, pair: int) -> str:
        return self.catalogue.species_of(self.s.problem.entries.row[self.s.entry[pair]])

    def _diverse(self, ranked) -> list[int]:
        """The best lines, at most two of a species, so that rivals stay visible."""
        kept, seen = [], {}
        for pair in ranked:
            name = self._species(pair)
            if seen.get(name, 0) < 2:
                kept.append(pair)
                seen[name] = seen.get(name, 0) + 1
            if len(kept) == KEPT:
                break
        return kept

    def _certainty(self, pairs) -> float:
        """Certainty of the components behind a feature's pairs, weighted by probability."""
        if len(pairs) == 0 or np.all(self.certainty == 1.0):
            return 1.0
        certain = self.certainty[self.s.problem.entries.component[self.s.entry[pairs]]]
        weight = self.s.probability[pairs] + 1e-12
        return float(np.sum(weight * certain) / np.sum(weight))

    def _candidate(self, pair: int, sure: float) -> Candidate:
        e = self.s.problem.entries
        entry = int(self.s.entry[pair])
        row, cat = int(e.row[entry]), self.catalogue
        component = self.components[int(e.component[entry])]
        return Candidate(
            species=cat.species_of(row),
            origin=component.origin,
            wave=float(cat.wave[row]),
            wave_err=float(cat.wave_err[row]),
            e_low=float(cat.e_low[row]),
            loggf=float(cat.loggf[row]),
            velocity=float(component.velocity),
            probability=float(min(self.s.probability[pair], 1.0)) * sure,
            share=float(self.s.groups.share[entry]),
            offset_sigma=float(self.s.offset_sigma[pair]),
            depth_predicted=float(self.depth[entry]),
            source=cat.source_keys[int(cat.source[row])],
        )

    def _blend(self, pair: int) -> tuple[tuple[str, float, float], ...]:
        """Other lines of the best line's group that carry a share of at least a fifth."""
        e = self.s.problem.entries
        best = int(self.s.entry[pair])
        half = self.s.problem.group_half_width[best]
        low, high = np.searchsorted(e.wave, [e.wave[best] - half, e.wave[best] + half])
        near = np.arange(low, high)
        near = near[(e.population[near] == e.population[best]) & (near != best)]
        relative = 10.0 ** (SHARE_EXPONENT * (self.s.strength[near] - self.s.strength[best]))
        share = np.minimum(self.s.groups.share[best] * relative, 1.0)
        listed = np.nonzero(share >= BLEND_SHARE)[0]
        listed = listed[np.argsort(-share[listed], kind="stable")]
        return tuple(
            (
                self.catalogue.species_of(int(e.row[near[i]])),
                float(self.catalogue.wave[e.row[near[i]]]),
                float(share[i]),
            )
            for i in listed
        )
