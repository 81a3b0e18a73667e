"""Which line made which feature: marginals of the matching of lines and features.

Each feature has one source (a line, or something unlisted) and each line makes at most
one feature. The marginal probabilities of that matching are found by loopy belief
propagation, which for this graph converges always to one fixed point: Williams & Lau
2014, IEEE Trans. Aerosp. Electron. Syst. 50, 2942 (from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

NEGLIGIBLE = 1e-5  # odds below which a pair cannot sway any other
ITERATIONS, TOLERANCE = 40, 1e-4  # at most so many; change of a message that ends them


@dataclass(frozen=True, eq=False)
class Marginals:
    """pair: P(line made feature) per pair; unlisted: P(no line) per feature;
    missing: P(line made no feature) per line; message: of each pair's line to its feature,
    from which the next call on the same pairs may start."""

    pair: np.ndarray
    unlisted: np.ndarray
    missing: np.ndarray
    message: np.ndarray


def associate(feature, line, odds, sizes, start=None) -> Marginals:
    """Marginals from pair odds.

    feature, line: int arrays (p,), the pairs; odds: (p,) likelihood that the line made the
    feature over likelihood that line and feature are unrelated; sizes: (features, lines);
    start: (p,) messages to begin with, all open by default.
    """
    n_feature, n_line = sizes
    if len(odds) == 0:
        return Marginals(np.zeros(0), np.ones(n_feature), np.ones(n_line), np.zeros(0))
    open_line = _open_lines(feature, line, odds, sizes, start)
    offer = odds * open_line
    norm = 1.0 + np.bincount(feature, offer, n_feature)
    pair = offer / norm[feature]
    missing = np.clip(1.0 - np.bincount(line, pair, n_line), 0.0, 1.0)
    return Marginals(pair, 1.0 / norm, missing, open_line)


def _open_lines(feature, line, odds, sizes, start):
    """Message of each line to each feature, (p,): how free the line is to make it.

    A line wanted by one feature only is free; messages run between the others alone.
    """
    n_feature, n_line = sizes
    message = np.ones_like(odds)
    weighty = odds > NEGLIGIBLE
    wanted_by = np.bincount(line[weighty], minlength=n_line)
    loose = weighty & (wanted_by[line] == 1)
    edges = np.nonzero(weighty & (wanted_by[line] > 1))[0]
    if len(edges) == 0:
        return message
    fixed = 1.0 + np.bincount(feature[loose], odds[loose], n_feature)
    (f, n_f), (i, n_i), power = _compact(feature[edges]), _compact(line[edges]), odds[edges]
    fixed = fixed[feature[edges]]
    open_line = np.ones(len(edges)) if start is None else start[edges]
    for _ in range(ITERATIONS):
        offer = power * open_line
        claim = power / (fixed + np.maximum(np.bincount(f, offer, n_f)[f] - offer, 0.0))
        wanted = np.bincount(i, claim, n_i)[i]
        updated = 1.0 / (1.0 + np.maximum(wanted - claim, 0.0))
        change = float(np.max(np.abs(updated - open_line)))
        open_line = updated
        if change < TOLERANCE:
            break
    message[edges] = open_line
    return message


def _compact(index):
    """(indices from 0 without holes, how many)."""
    used = np.zeros(int(index.max()) + 1, dtype=np.int64)
    used[index] = 1
    renumbered = np.cumsum(used) - 1
    return renumbered[index], int(renumbered[-1]) + 1
