"""Claims inside molecular bands: many unlisted features there, and shallow ones prove nothing.

Inside a band that is seen the density of unlisted features is learned apart. A feature no
deeper than the band's own forest may be any of its lines, so an atomic claim on it stays below
the bound of the firm ones.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from .mixture import solve_mixture
from .model import standing_of
from .problem import inside

ROUNDS = 6
FEWEST = 20  # features inside bands before their density is learned apart
FOREST = 0.75  # quantile of the depths of unlisted features inside: what the bands can make
CAP = 0.94  # probability of claims within that forest: below the firm bound
FLAG = "in-band"


def merged(ranges):
    """(k, 2) ascending ranges without overlaps."""
    out: list[list[float]] = []
    for low, high in sorted((float(a), float(b)) for a, b in ranges):
        if out and low <= out[-1][1]:
            out[-1][1] = max(out[-1][1], high)
        else:
            out.append([low, high])
    return np.array(out, dtype=float).reshape(-1, 2)


def weigh_banded(weighing, ranges):
    """The weighing with unlisted features inside and outside ``ranges`` weighed apart.

    ranges: observed vacuum (low, high) of the bands seen; none leaves all as it is.
    """
    if not len(ranges):
        return weighing
    ranges, problem = merged(ranges), weighing.solution.problem
    crowd = crowding(problem, weighing.solution.unlisted, ranges)
    weighing = replace(weighing, bands=tuple(map(tuple, ranges.tolist())))
    if crowd is None:
        return weighing
    solution = solve_mixture(replace(problem, crowd=crowd), ROUNDS, start=weighing.solution.state)
    return replace(weighing, solution=solution)


def crowding(problem, unlisted, ranges):
    """Density of unlisted absorption features at each feature over the mean one, (f,); None
    where too few stand inside or the searched ranges have no part outside."""
    f = problem.features
    within = inside(f.wave, ranges)
    length = _overlap(problem.coverage, ranges)
    outside = problem.length() - length
    dark = f.sign > 0
    if np.sum(within & dark) < FEWEST or length <= 0 or outside <= 0:
        return None
    mean = np.sum(unlisted[dark]) / problem.length()
    inner = np.sum(unlisted[dark & within]) / length
    outer = np.sum(unlisted[dark & ~within]) / outside
    if not mean > 0 or inner <= outer:
        return None
    return np.where(dark, np.where(within, inner, max(outer, 0.1 * mean)) / mean, 1.0)


def _overlap(coverage, ranges) -> float:
    """Length of the coverage that lies inside the ranges, Angstrom."""
    low = np.maximum(coverage[:, None, 0], ranges[None, :, 0])
    high = np.minimum(coverage[:, None, 1], ranges[None, :, 1])
    return float(np.sum(np.maximum(high - low, 0.0)))


def capped(claims, features, ranges):
    """The claims with those inside bands flagged, and held below firm within the forest.

    features: FeatureTable. A person's claims are not the machine's to change.
    """
    hold = holder(claims, features, ranges)
    return claims if hold is None else tuple(hold(i, c) for i, c in enumerate(claims))


def holder(claims, features, ranges):
    """What ``capped`` does to one claim, (row, claim) -> claim, with the forest as these claims
    of all features leave it; None without bands."""
    if not len(ranges):
        return None
    within = inside(features.wave, merged(ranges)) & (features.sign > 0)
    open_ = within & np.array([c.p_unlisted > 0.5 for c in claims], dtype=bool)
    depths = features.depth[open_ & np.isfinite(features.depth)]
    forest = float(np.quantile(depths, FOREST)) if len(depths) >= FEWEST else np.inf

    def hold(row: int, claim):
        if not within[row] or not claim.candidates:
            return claim
        return _held(claim, not features.depth[row] > forest)

    return hold


def _held(claim, shallow: bool):
    flags = f"{claim.flags} {FLAG}".strip()
    if not shallow or claim.probability <= CAP or claim.origin not in ("stellar", "unknown"):
        return replace(claim, flags=flags)
    share = CAP / claim.probability
    candidates = tuple(replace(c, probability=c.probability * share) for c in claim.candidates)
    return replace(
        claim, flags=flags, probability=CAP, p_line=claim.p_line * share,
        p_unlisted=max(claim.p_unlisted, 1.0 - CAP), standing=standing_of(CAP),
        candidates=candidates,
    )  # fmt: skip
