"""How far predicted strengths are off: what decides which line of a blend is its main one.

A line's predicted strength errs by its log gf, by its species' offset, and by what the model
atmosphere leaves out. The last is read off the spectrum. Where depths are measured, it is
their scatter about the learned relation. Where there are positions only, it is how gently the
learned detection curve rises: a sharp limit blurred by the errors of the strengths.
"""

from __future__ import annotations

import numpy as np

from .curves import CENTRES, SLOPE
from .entries import PROBIT

UNKNOWN_ERROR = 0.5  # dex, of a log gf without one
LEAST, MOST = 0.15, 0.8  # dex: one layer in LTE is no better; beyond, strengths say nothing
FIRST_SPREAD = PROBIT / (SLOPE * np.log(10.0))  # of the detection curve's first form
UNSEEN = 0.5  # dex: most that an offset adds, that of a species of which nothing is seen
ENOUGH = 12  # measured pairs
WELL_MEASURED = 0.2  # dex of predicted strength
FARTHEST = 1.5  # dex: residuals beyond are other lines
QUARTILES = 1.349  # sigma between the quartiles of a normal curve


def strength_errors(problem, state):
    """Error (n,) of the entries' predicted strengths, dex."""
    offset = np.minimum(state.offset_errors[problem.entries.species], UNSEEN)
    return np.sqrt(state.spread**2 + loggf_errors(problem) ** 2 + offset**2)


def loggf_errors(problem):
    if problem.loggf_err is None:
        return np.full(len(problem.entries), UNKNOWN_ERROR)
    return problem.loggf_err


def learn_spread(problem, pairs, step, learned) -> float:
    """The error of strengths beyond that of log gf, dex.

    step: the round's marginals and groups (mixture); learned: (Block of the star's lines,
    its detection curve, its strength relation).
    """
    block, detection, relation = learned
    sure = step.marginals.pair > 0.5
    mine = block.graded[sure[block.graded]]
    slope = relation.slope(step.groups.total[pairs.entry[mine]])
    fit = np.sqrt(pairs.m_variance[mine]) < WELL_MEASURED * slope
    mine, slope = mine[fit], slope[fit]
    if len(mine) >= ENOUGH:
        expected = relation(step.groups.total[pairs.entry[mine]])
        off = np.clip((pairs.m[mine] - expected) / slope, -FARTHEST, FARTHEST)
        variance = off**2 - pairs.m_variance[mine] / slope**2
    else:
        mine = block.pairs[sure[block.pairs]]
        variance = np.full(len(mine), _rise(detection) ** 2)
    if len(mine) == 0:
        return FIRST_SPREAD
    variance = variance - loggf_errors(problem)[pairs.entry[mine]] ** 2
    weight = step.marginals.pair[mine]
    mean = float(np.sum(weight * variance) / np.sum(weight))
    return float(np.clip(np.sqrt(max(mean, 0.0)), LEAST, MOST))


def _rise(detection) -> float:
    """Sigma (dex) of the normal integral that rises as the detection curve does."""
    value = detection.value / detection.value[-1]
    low, high = np.interp([0.25, 0.75], value, CENTRES)
    return float(high - low) / QUARTILES
