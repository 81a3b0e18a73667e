"""What the claims of a round say of each species' strength offset.

A line's own claim must not vouch for itself: where few lines speak for a species, each line
is weighed with the offset that the others alone would give.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from .curves import CENTRES, bin_of
from .offsets import (
    GRID,
    SCALE,
    best_offsets,
    detection_log_likelihood,
    shared_offset,
    strength_log_likelihood,
)
from .pairs import Block, Pairs
from .problem import Problem

SPEAKS = 0.02  # P(seen) from which a line's own word counts
SURE = 0.1  # dex: below this error one line more or less changes nothing


@dataclass(frozen=True, eq=False)
class OwnOffsets:
    """entries: rows with an offset of their own; offset: dex."""

    entries: np.ndarray
    offset: np.ndarray


@dataclass(frozen=True, eq=False)
class Evidence:
    """One population's: the Block, strengths (n,), hits and tries (n,) of its entries, the
    detection curve, and of its measured pairs the entry (within the block) with the
    arguments of ``strength_log_likelihood``."""

    block: Block
    strength: np.ndarray
    hits: np.ndarray
    tries: np.ndarray
    curve: object
    who: np.ndarray
    measured: tuple


def learn_offsets(problem: Problem, pairs: Pairs, step, state):
    """The state with offsets by species and by line, from the claims of a round.

    Each population's species have indices of their own. What all species of a population
    share is no offset but the zero point, which the curves hold: left in, it grows from
    round to round in crowded spectra and carries the species of most lines with it.
    step: the round's marginals, groups and strengths (mixture); state: what was learned.
    """
    mean, error = np.zeros(problem.species), np.full(problem.species, SCALE)
    seen = np.bincount(pairs.entry, step.marginals.pair, len(problem.entries))
    lines = np.bincount(problem.entries.species, seen, problem.species)
    rows, alone = [np.zeros(0, dtype=int)], [np.zeros(0)]
    for block in pairs.blocks:
        offset, error[block.species], which, apart = block_offsets(
            problem, pairs, step, state, (block, seen)
        )
        zero = shared_offset(offset, lines[block.species])
        mean[block.species] = offset - zero
        rows.append(which)
        alone.append(apart - zero)
    own = OwnOffsets(np.concatenate(rows), np.concatenate(alone))
    return replace(state, offsets=mean, offset_errors=error, own=own)


def block_offsets(problem: Problem, pairs: Pairs, step, state, which):
    """(offset, error, entries, own) of a block, the zero point still in them: dex by species;
    entries that speak for an uncertain species and the offset that the others alone give.

    which: (Block, P(seen) per entry).
    """
    block, seen = which
    evidence = _evidence(problem, pairs, step, state, which)
    table = _table(evidence)
    offset, error = best_offsets(table)
    rows, apart = without_own(evidence, table, error, seen[block.entries])
    return offset, error, rows, apart


def _evidence(problem: Problem, pairs: Pairs, step, state, which) -> Evidence:
    """which: (Block, P(seen) per entry)."""
    block, seen = which
    e, here = problem.entries, block.entries
    share, seen = step.groups.share[here], seen[here]
    exposure = step.groups.first[here] * pairs.covered[here] if problem.complete else seen
    mine = block.graded[step.marginals.pair[block.graded] > 0.05]
    entry, relation = pairs.entry[mine], state.relation[block.population]
    measured = (
        pairs.m[mine] - relation(e.strength[entry]),
        relation.slope(step.strength[entry]),
        max(relation.scatter, 0.2),
        step.marginals.pair[mine] * step.groups.share[entry],
    )
    return Evidence(
        block,
        e.strength[here],
        seen * share,
        exposure * share,
        state.detection[block.population],
        np.searchsorted(here, entry),
        measured,
    )


def _table(v: Evidence):
    """Log-likelihood of every species' offset, (species, offsets)."""
    count, names = len(v.block.species), v.block.names
    return detection_log_likelihood(
        v.strength, v.hits, v.tries, names, count, v.curve
    ) + strength_log_likelihood(*v.measured, names[v.who], count)


def without_own(v: Evidence, table, error, seen):
    """(entries, offset in dex) of the lines that speak for an uncertain species: the offset
    by the species' other lines alone.

    table: (species, offsets) log-likelihoods; error: (species,) dex; seen: (n,).
    """
    names = v.block.names
    rows = np.nonzero((seen > SPEAKS) & (error[names] > SURE))[0]
    if len(rows) == 0:
        return v.block.entries[rows], np.zeros(0)
    shown = v.curve(CENTRES[:, None] + GRID[None, :])[bin_of(v.strength[rows])]
    hits, misses = v.hits[rows], np.maximum(v.tries[rows] - v.hits[rows], 0.0)
    mine = hits[:, None] * np.log(shown) + misses[:, None] * np.log1p(-shown)
    place = np.full(len(names), -1)
    place[rows] = np.arange(len(rows))
    with_measure = place[v.who] >= 0
    residual, slope, scatter, weight = v.measured
    mine += strength_log_likelihood(
        residual[with_measure],
        slope[with_measure],
        scatter,
        weight[with_measure],
        place[v.who][with_measure],
        len(rows),
    )
    return v.block.entries[rows], best_offsets(table[names[rows]] - mine)[0]
