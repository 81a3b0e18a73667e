"""Lines hidden in the features of others: that they are not seen says little.

Two lines within one resolution element make one feature, the stronger one's. Where something
unlisted made a feature, a listed line beside it may be there all the same, the weaker of the
two; only a line that would have been the stronger one speaks against by being absent. Lines
of the list share their features by ``Groups.first``; this is the same for the unlisted.
"""

from __future__ import annotations

import numpy as np

from .curves import CENTRES, bin_of
from .entries import PROBIT
from .populations import STELLAR

EVEN = 0.25  # before anything is learned, as share_above gives it at the median
HALF = np.log10(2.0)  # dex: the main source makes at least half of the strength


def share_above(strength, seen):
    """Chance (at CENTRES) that something unlisted is stronger than a line of such a strength.

    strength, seen: (n,) predicted strength of lines and P(seen). Lists end at weak lines, so an
    unlisted one is taken to be like the weaker of two features.
    """
    mass = np.bincount(bin_of(strength), seen, len(CENTRES)) + 1e-9
    above = 1.0 - (np.cumsum(mass) - 0.5 * mass) / np.sum(mass)
    return above**2


def absence(problem, pairs, state, groups, shown):
    """Chance (p,) that each pair's line makes no feature of its own, its feature being another's.

    shown: (p,) chance that it makes one when nothing hides it.
    """
    if not problem.complete:
        return np.ones(len(shown))
    missing = 1.0 - shown * pairs.covered[pairs.entry]
    for block in pairs.blocks:
        if block.population == STELLAR:
            beside = np.abs(pairs.own[block.pairs]) < problem.group_half_width[pairs.entry[block.pairs]]
            rows = block.pairs[beside]
            missing[rows] += (1.0 - missing[rows]) * _weaker(pairs, state, groups, rows)
    return missing


def _weaker(pairs, state, groups, rows):
    """Chance that the line made less than half of a feature that something else made: by the
    measured depth, or by how strong features are where none was measured."""
    total = groups.total[pairs.entry[rows]]
    out = np.full(len(rows), EVEN)
    if state.above is not None:
        out = np.interp(total, CENTRES, state.above)
    known = np.isfinite(pairs.m[rows])
    relation, which = state.relation[STELLAR], rows[known]
    error = np.sqrt(relation.scatter**2 + pairs.m_variance[which])
    excess = pairs.m[which] - relation(total[known] + HALF)
    out[known] = 1.0 / (1.0 + np.exp(-PROBIT * excess / error))
    return out
