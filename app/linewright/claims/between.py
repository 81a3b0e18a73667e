"""Who makes most of a feature in which lines of the star and of the air meet.

The mixture gives each feature one source. Where lines of two origins stand within one width
both are there, and a feature as deep as the two together fits neither alone. Here their depths
are weighed together: the air's is well known once air mass and water column have been learned
from its other lines, the star's less well, or its line is not in the list at all; what the
feature's depth leaves beside the air's part, and where the centroid stands between the two,
says which is the larger.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from .curves import CENTRES
from .entries import RESOLUTION_SHARE
from .mixture import STRENGTH_RANGE, STRENGTH_TAIL, Solution, tailed
from .populations import STELLAR, TELLURIC
from .problem import NOT_SAID
from .unlisted import STRENGTH_BINS

WITHIN = 0.45  # of the FWHM: sigma of the weight of a line beside a feature's centre
ADDING = 0.05  # dex: scatter of the measured depth of a blend about the sum of its parts
NODES, AIR_NODES, SIGMAS = 21, 11, 3.5  # depths tried about the predicted one, and how far
SMALLEST = 0.002  # depth of an unlisted line
SLIGHT = 0.02  # or unless it already has that much of the claim
LEARNED = 12  # of the air's lines: so many make its relation of strength and depth (curves)
FEW = 15  # sure lines that tell a population's width
LEAST = 0.1  # share of the measured depth below which the air does not matter
COMPLETE = 0.5  # of the most often seen: weaker lines are seen where noise or others lift them
STAR_SCATTER = 0.2  # dex: at least, of a star's predicted strengths (oscillator strengths)
AIR_SCATTER = 0.06  # the same for the air's, learned from lines that nothing disturbs
AIR_TAIL = 0.003  # share of the air's lines whose strength is far off
TINY = 1e-300


@dataclass(frozen=True, eq=False)
class Side:
    """The lines of one origin about each of n features, as one.

    m: expected strength, dex, alone; scatter: its sigma; place, sigma: vacuum Angstrom
    there: probability that the list is right about them; 0 where it has none
    reach: what the lines have of the feature over what they have of the depth at its centre
    """

    m: np.ndarray
    scatter: float
    place: np.ndarray
    sigma: np.ndarray
    there: np.ndarray
    reach: np.ndarray

    def take(self, rows) -> Side:
        m, place, sigma, there, reach = (
            column[rows] for column in (self.m, self.place, self.sigma, self.there, self.reach)
        )
        return Side(m, self.scatter, place, sigma, there, reach)


def shared_between(solution: Solution) -> Solution:
    """The marginals of features in which the air matters, weighed again for two sources.

    Those of other populations than star and air keep theirs. A person's words stand. Nothing
    changes where too few of the air's lines are seen to know how deep they are.
    """
    e, f = solution.problem.entries, solution.problem.features
    kind = e.population[solution.entry]
    if float(np.sum(solution.probability[kind == TELLURIC])) < LEARNED:
        return solution
    air, star = _side(solution, TELLURIC), _side(solution, STELLAR)
    rows = np.isfinite(f.strength) & (f.sign > 0) & (air.there > 0)
    rows &= (air.m > f.strength + np.log10(LEAST)) | (_held(solution, TELLURIC) > SLIGHT)
    if solution.problem.said is not None:
        rows &= solution.problem.said == NOT_SAID
    rows = np.nonzero(rows)[0]
    if len(rows) == 0:
        return solution
    shares = _shares(_seen(solution, rows), air.take(rows), star.take(rows))
    return _with(solution, rows, shares)


def _held(solution: Solution, population: int):
    """P(f,) that a population's line made the feature."""
    mine = solution.problem.entries.population[solution.entry] == population
    return np.bincount(solution.feature, solution.probability * mine, len(solution.problem.features))


def _side(solution: Solution, population: int) -> Side:
    """What one population's lines would make at every feature (f,)."""
    e, f = solution.problem.entries, solution.problem.features
    pairs = np.nonzero(e.population[solution.entry] == population)[0]
    feature, entry, count = solution.feature[pairs], solution.entry[pairs], len(f)
    curve, relation = solution.state.detection[population], solution.state.relation[population]
    depth = depth_of(alone(relation, curve, solution.strength[entry])) * unclaimed(solution, pairs)
    apart = f.wave[feature] - e.wave[entry]
    own = WITHIN * _line_width(solution, pairs) * f.wave[feature]
    part = -np.log1p(-np.clip(depth * np.exp(-0.5 * (apart / own) ** 2), 0.0, 0.99))
    near = depth * weight_beside(solution, pairs)
    total = np.bincount(feature, part, count)
    safe = np.maximum(total, 1e-9)
    place = np.bincount(feature, part * e.wave[entry], count) / safe
    sigma = np.bincount(feature, part * solution.sigma[pairs], count) / safe
    whole = 1.0 - np.exp(-total)
    there = np.where(whole > 1e-4, float(curve.value[-1]), 0.0)
    scatter = max(STAR_SCATTER, relation.scatter) if population == STELLAR else _spread(solution, pairs)
    return Side(
        logit(np.clip(whole, 1e-4, 0.99)), scatter, place, np.maximum(sigma, 1e-3), there,
        np.bincount(feature, near, count) / np.maximum(whole, 1e-9),
    )


def _line_width(solution: Solution, pairs) -> float:
    """Typical FWHM over wavelength of a population's lines, from its surest pairs."""
    f, e = solution.problem.features, solution.problem.entries
    narrow = float(np.median(solution.problem.group_half_width / e.wave)) / RESOLUTION_SHARE
    sure = solution.feature[pairs[solution.probability[pairs] > 0.9]]
    width = (f.fwhm / f.wave)[sure]
    width = width[np.isfinite(width)]
    return max(narrow, float(np.median(width))) if len(width) >= FEW else narrow


def weight_beside(solution: Solution, pairs):
    """How far each pair's line reaches into its feature, 0-1."""
    f, e = solution.problem.features, solution.problem.entries
    feature, entry = solution.feature[pairs], solution.entry[pairs]
    width = WITHIN * np.nan_to_num(f.fwhm[feature]) + 1e-3
    return np.exp(-0.5 * ((f.wave[feature] - e.wave[entry]) / width) ** 2)


def unclaimed(solution: Solution, pairs):
    """Probability that no other feature is made by each pair's line."""
    seen = np.bincount(solution.entry, solution.probability, len(solution.problem.entries))
    elsewhere = seen[solution.entry[pairs]] - solution.probability[pairs]
    return 1.0 - np.clip(elsewhere, 0.0, 1.0)


def alone(relation, curve, strength):
    """Expected strength m of lines alone, however weak: those that hardly show grow in
    proportion to their opacity."""
    low = float(CENTRES[int(np.argmax(curve.value >= COMPLETE * curve.value[-1]))])
    return relation(np.maximum(strength, low)) + np.minimum(strength - low, 0.0)


def _spread(solution: Solution, pairs) -> float:
    """Scatter (dex) of the depths of well-seen lines that nothing disturbs."""
    entry, m = solution.entry[pairs], solution.problem.features.strength[solution.feature[pairs]]
    kind = int(solution.problem.entries.population[entry[0]]) if len(entry) else TELLURIC
    curve, relation = solution.state.detection[kind], solution.state.relation[kind]
    total = solution.groups.total[entry]
    sure = (solution.probability[pairs] > 0.9) & np.isfinite(m)
    sure &= curve(total) > COMPLETE * curve.value[-1]
    if np.sum(sure) < 10:
        return relation.scatter
    return max(1.4826 * float(np.median(np.abs(m[sure] - relation(total[sure])))), AIR_SCATTER)


@dataclass(frozen=True, eq=False)
class Seen:
    """Measured strength m with its error, place, half width (Angstrom) of n features, and the
    density of unlisted ones there: per Angstrom, and per dex over STRENGTH_BINS; shows: chance
    that what is so strong is seen at all, which the density of unlisted ones has in it."""

    m: np.ndarray
    error: np.ndarray
    place: np.ndarray
    half: np.ndarray
    density: np.ndarray
    strengths: np.ndarray
    shows: np.ndarray

    def unlisted(self, m):
        """Density per Angstrom and dex of unlisted features of strengths m (n, ...)."""
        index = np.clip(np.digitize(m, STRENGTH_BINS) - 1, 0, len(STRENGTH_BINS) - 2)
        each = self.density.reshape(-1, *[1] * (np.ndim(m) - 1))
        return each * self.strengths[index]


def _seen(solution: Solution, rows) -> Seen:
    f, null = solution.problem.features, solution.state.null
    crowd = solution.problem.crowd
    density = null.density[0] * (np.ones(len(rows)) if crowd is None else crowd[rows])
    return Seen(
        f.strength[rows],
        np.hypot(np.nan_to_num(f.strength_err[rows]), ADDING),
        f.wave[rows],
        WITHIN * np.nan_to_num(f.fwhm[rows]) + 1e-3,
        density,
        null.strengths[0],
        _chance_to_show(solution, f.strength[rows]),
    )


def _chance_to_show(solution: Solution, m):
    """P(a feature of strength m is seen), from how often the air's lines so strong are."""
    curve, relation = solution.state.detection[TELLURIC], solution.state.relation[TELLURIC]
    return np.interp(m, relation.value, curve.value / curve.value[-1])


def _shares(seen: Seen, air: Side, star: Side):
    """(n, 3) probabilities that the air, the star's listed lines, or neither is the main
    contributor of each feature."""
    both_air, both_star = _together(seen, air, star)
    more_air, more_other = _with_unlisted(seen, air)
    air_only = air.there * (1.0 - star.there)
    star_only = (1.0 - air.there) * star.there
    both, neither = air.there * star.there, (1.0 - air.there) * (1.0 - star.there)
    out = np.column_stack((
        seen.shows * (both * both_air + air_only * _alone(seen, air, AIR_TAIL)) + air_only * more_air,
        seen.shows * (both * both_star + star_only * _alone(seen, star, STRENGTH_TAIL)),
        air_only * more_other + neither * seen.unlisted(seen.m),
    ))
    return out / np.maximum(out.sum(axis=1, keepdims=True), TINY)


def _together(seen: Seen, air: Side, star: Side):
    """Likelihoods (n,) of both making the feature, the air more of it, and the star."""
    (a_m, a_w), (s_m, s_w) = _nodes(air, AIR_TAIL, AIR_NODES), _nodes(star, STRENGTH_TAIL, NODES)
    a, s = depth_of(a_m)[:, :, None], depth_of(s_m)[:, None, :]
    part = a / (a + s)
    centre = star.place[:, None, None] + part * (air.place - star.place)[:, None, None]
    sigma = star.sigma[:, None, None] + part * (air.sigma - star.sigma)[:, None, None]
    z = (seen.m[:, None, None] - logit(1.0 - (1.0 - a) * (1.0 - s))) / seen.error[:, None, None]
    likely = a_w * s_w[:, None, :, 0] * np.exp(-0.5 * z * z) * tailed(seen.place[:, None, None] - centre, sigma)
    likely = likely / (seen.error * np.sqrt(2 * np.pi))[:, None, None]
    larger = a * air.reach[:, None, None] > s * star.reach[:, None, None]
    mine = np.sum(likely * larger, axis=(1, 2))
    return mine, np.sum(likely, axis=(1, 2)) - mine


def _with_unlisted(seen: Seen, air: Side):
    """Likelihoods (n,) of the air and an unlisted line together, either making more of it.

    What the air leaves of the depth D is the other's, u; dm_u/dm = D/u, and a place of the
    centroid leaves the other (a + u)/u as much room, within the feature.
    """
    m, weight = _nodes(air, AIR_TAIL, NODES)
    a, d = depth_of(m), depth_of(seen.m)[:, None]
    weight = weight[:, :, 0]
    u = np.clip(1.0 - (1.0 - d) / (1.0 - a), SMALLEST, 0.99)
    room = (1.0 + a / u) * (np.abs(seen.place - air.place)[:, None] * (1.0 + a / u) < seen.half[:, None])
    likely = weight * room * seen.unlisted(logit(u)) * (d / u) * (d > a)
    larger = a * air.reach[:, None] > u
    return np.sum(likely * larger, axis=1), np.sum(likely * ~larger, axis=1)


def _alone(seen: Seen, side: Side, tail: float):
    """Likelihood (n,) of one side making the feature by itself."""
    m, weight = _nodes(side, tail, NODES)
    z = (seen.m[:, None] - m) / seen.error[:, None]
    likely = np.sum(weight[:, :, 0] * np.exp(-0.5 * z * z), axis=1)
    likely = likely / (seen.error * np.sqrt(2 * np.pi))
    return likely * tailed(seen.place - side.place, side.sigma)


def _nodes(side: Side, tail: float, count: int):
    """Strengths (n, count) about the expected one, and their prior weights (1, count, 1)."""
    z = np.linspace(-SIGMAS, SIGMAS, count)
    weight = (1 - tail) * np.exp(-0.5 * z * z) / np.sqrt(2 * np.pi)
    weight += tail * side.scatter / STRENGTH_RANGE
    return side.m[:, None] + side.scatter * z, (weight / weight.sum())[None, :, None]


def _with(solution: Solution, rows, shares) -> Solution:
    """The solution with air, star and unlisted of these features sharing what other
    populations leave; within each as the mixture had it."""
    e, count = solution.problem.entries, len(solution.problem.features)
    kind = e.population[solution.entry]
    here = np.zeros(count, dtype=bool)
    here[rows] = True
    probability, unlisted = solution.probability.copy(), solution.unlisted.copy()
    left = np.zeros(count)
    mine = np.isin(kind, (TELLURIC, STELLAR)) & here[solution.feature]
    other = np.bincount(solution.feature, np.where(mine, 0.0, probability), count)
    left[rows] = np.clip(1.0 - other[rows], 0.0, 1.0)
    shares = _as_before(solution, rows, shares)
    unlisted[rows] = left[rows] * shares[:, 2]
    for column, population in enumerate((TELLURIC, STELLAR)):
        pairs = np.nonzero(mine & (kind == population))[0]
        part = probability[pairs] + 1e-6 * weight_beside(solution, pairs) + 1e-12
        whole = np.bincount(solution.feature[pairs], part, count)
        given = np.zeros(count)
        given[rows] = left[rows] * shares[:, column]
        feature = solution.feature[pairs]
        probability[pairs] = part / whole[feature] * given[feature]
    odds = log_odds(solution.feature, probability, unlisted)
    between = odds - log_odds(solution.feature, solution.probability, solution.unlisted)
    between = np.where(here[solution.feature], between, 0.0)
    return replace(solution, probability=probability, unlisted=unlisted, between=between)


def _as_before(solution: Solution, rows, shares):
    """The shares, with star and unlisted sharing what the air leaves as the mixture had it,
    the more the less it gave the air."""
    air, star = (_held(solution, k)[rows] for k in (TELLURIC, STELLAR))
    before = star / np.maximum(star + solution.unlisted[rows], TINY)
    rest = 1.0 - shares[:, 0]
    now = shares[:, 1] / np.maximum(rest, TINY)
    listed = rest * (air * now + (1.0 - air) * before)
    return np.column_stack((shares[:, 0], listed, rest - listed))


def log_odds(feature, probability, unlisted):
    """ln of P(pair)/P(no listed line) of each pair (p,)."""
    return np.log(np.maximum(probability, TINY)) - np.log(np.maximum(unlisted[feature], TINY))


def logit(depth):
    return np.log10(depth / (1.0 - depth))


def depth_of(m):
    return 1.0 / (1.0 + 10.0 ** (-np.asarray(m)))
