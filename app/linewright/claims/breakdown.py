"""The probability's breakdown: what each factor of the odds says for one candidate.

The odds of a candidate line against 'no listed line' are a product: how readily the line
shows, how well it is placed, how well its strength fits, and how free it is of other
features that want it. The breakdown keeps the factors of the engine's last round with
what is needed to compute them again under changed circumstances (see ``facts``).
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from .entries import LN10, PROBIT, SHARE_EXPONENT
from .hidden import absence
from .mixture import chance_to_show, own_place, position_likelihood, strength_likelihood
from .pairs import Pairs
from .populations import STELLAR
from .problem import NOT_SAID
from .strength_errors import strength_errors

NEGLIGIBLE = 1e-3  # candidates less probable than this keep no breakdown
STEP = 0.5  # dex by which the readiness to show is tried
DIGITS = 4


class Breakdown(NamedTuple):
    """Natural logarithms of the first four factors, then what they were made of.

    show: P(shows)/P(stays away or hides); place: position likelihood over the density of
    unlisted features; strength: likelihood of the measured strength over that of unlisted features;
    free: of other features that want the line, 0 where none does
    sigma: of the offset, Angstrom; of which ``own``: the feature's part, without the list's
    blend: feature less the centroid of the line's blend, Angstrom
    excess: measured strength less the expected one, dex; scatter: its sigma, dex, 0 where no
    strength is predicted or measured; slope: of measured against predicted strength
    stronger, weaker: change of log P(shows) for a line STEP dex stronger or weaker
    at_own: weight of the line's own place against the centroid, 0-1
    between: ln of what weighing the star's part of a blend against the air's did to the odds
    first: chance to be the main line of its blend, -1 not kept; keen: rise per dex of the
    logarithm of its odds there
    """

    show: float
    place: float
    strength: float
    free: float
    sigma: float
    own: float
    blend: float
    excess: float
    scatter: float
    slope: float
    stronger: float
    weaker: float
    at_own: float = 1.0
    between: float = 0.0
    first: float = -1.0
    keen: float = SHARE_EXPONENT * LN10

    @property
    def log_odds(self) -> float:
        """ln of P(this line)/P(no listed line)."""
        return self.show + self.place + self.strength + self.free + self.between


def breakdowns(solution, chosen) -> list[tuple[float, ...]]:
    """Breakdown of each chosen pair as a plain tuple; () where it is negligible or where a
    person's word decided.

    solution: Solution; chosen: (c,) pair indices.
    """
    columns = _columns(solution, chosen)
    told = solution.problem.said
    quiet = solution.probability[chosen] < NEGLIGIBLE
    if told is not None:
        quiet = quiet | (told[solution.feature[chosen]] != NOT_SAID)
    rows = zip(*(np.round(column, DIGITS).tolist() for column in columns))
    return [() if skip else row for skip, row in zip(quiet.tolist(), rows)]


def breakdown_of(solution, chosen) -> list[Breakdown]:
    """Breakdown of each chosen pair, however improbable."""
    return [Breakdown(*row) for row in zip(*(c.tolist() for c in _columns(solution, chosen)))]


def _columns(solution, chosen):
    """The fields of Breakdown for the chosen pairs, (c,) each."""
    problem, state, groups = solution.problem, solution.state, solution.groups
    order = np.unique(chosen)
    pairs = solution.pairs.only(problem, order)
    shown = chance_to_show(pairs, groups, state)[pairs.entry]
    position, sigma, _ = position_likelihood(pairs, state, groups)
    density, p0 = state.null.at(pairs.bins)
    density = density if problem.crowd is None else density * problem.crowd
    fits = strength_likelihood(pairs, state, groups, p0) / p0[pairs.feature]
    absent = absence(problem, pairs, state, groups, shown)
    show, place = np.log(shown / absent), np.log(position / density[pairs.feature])
    strength = np.log(fits)
    tiny = 1e-300
    odds = np.log(np.maximum(solution.probability[order], tiny))
    odds = odds - np.log(np.maximum(solution.unlisted[pairs.feature], tiny))
    own = np.sqrt(pairs.base_variance) * state.error_scale[pairs.crowded]
    blend = pairs.wave - groups.centroid[pairs.entry]
    between = np.zeros(len(odds)) if solution.between is None else solution.between[order]
    free = odds - show - place - strength - between
    strengths = _strengths(pairs, state, groups)
    at_own = own_place(pairs, groups)
    made = (show, place, strength, free, sigma, own, blend, *strengths, at_own, between)
    made += (groups.first[pairs.entry], _keen(problem, pairs, state))
    back = np.searchsorted(order, chosen)
    return tuple(column[back] for column in made)


def _keen(problem, pairs: Pairs, state):
    """Per pair, against a line whose strength is as uncertain."""
    star = problem.entries.population[pairs.entry] == STELLAR
    error = strength_errors(problem, state)[pairs.entry]
    return np.where(star, PROBIT / (np.sqrt(2.0) * error), SHARE_EXPONENT * LN10)


def _strengths(pairs: Pairs, state, groups):
    """(excess, scatter, slope, stronger, weaker) per pair."""
    total = groups.total[pairs.entry]
    out = np.zeros((3, len(total)))
    change = np.zeros((2, len(total)))
    for block in pairs.blocks:
        rows, relation = block.graded, state.relation[block.population]
        out[0, rows] = pairs.m[rows] - relation(total[rows])
        out[1, rows] = np.sqrt(relation.scatter**2 + pairs.m_variance[rows])
        out[2, rows] = relation.slope(total[rows])
        rows, curve = block.pairs, state.detection[block.population]
        now = np.log(curve(total[rows]))
        change[0, rows] = np.log(curve(total[rows] + STEP)) - now
        change[1, rows] = np.log(curve(total[rows] - STEP)) - now
    return *out, *change
