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


@dataclass(frozen=True, eq=False)
class Marginals:
    """pair: P(line made feature) per pair; unlisted: P(no line) per feature;
    ledger of ``missing``: P(line made no feature) per line."""

    pair: np.ndarray
    unlisted: np.ndarray
    missing: np.ndarray


def associate(feature, line, odds, sizes, rounds: int = 40, tolerance: float = 1e-4) -> Marginals:
    """Marginals from pair odds.

    feature, line: int arrays (p,), the pairs; odds: (p,) likelihood that the line made the
    feature over likelihood that line and feature are unrelated; sizes: (features, lines).
    """
    n_feature, n_line = sizes
    if len(odds) == 0:
        return Marginals(np.zeros(0), np.ones(n_feature), np.ones(n_line))
    everything = (feature, line, odds)
    weighty = odds > NEGLIGIBLE
    feature, line, odds = feature[weighty], line[weighty], odds[weighty]
    open_line = np.ones_like(odds)
    for _ in range(rounds):
        offer = odds * open_line
        total = np.bincount(feature, offer, n_feature)[feature]
        claim = odds / (1.0 + np.maximum(total - offer, 0.0))
        wanted = np.bincount(line, claim, n_line)[line]
        updated = 1.0 / (1.0 + np.maximum(wanted - claim, 0.0))
        change = float(np.max(np.abs(updated - open_line)))
        open_line = updated
        if change < tolerance:
            break
    feature, line, odds = everything
    offer = odds.copy()
    offer[weighty] *= open_line
    norm = 1.0 + np.bincount(feature, offer, n_feature)
    pair = offer / norm[feature]
    missing = np.clip(1.0 - np.bincount(line, pair, n_line), 0.0, 1.0)
    return Marginals(pair, 1.0 / norm, missing)
