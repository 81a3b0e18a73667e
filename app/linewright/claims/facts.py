"""The one or two facts that would change a verdict, computed by weighing the claim again.

Each candidate keeps the factors of its odds (``breakdown``). A fact changes what one of
them was made of (where the feature stands, how strong the species is, whether a rival or
another feature is out of the way) and the odds are taken again, all else as it is. Facts
that carry the probability across the nearest bound between standings are told, the
likeliest first; where none does, that is told with the one that moves it most.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from ..spectra.medium import C_KM_S, to_medium
from .breakdown import STEP, Breakdown
from .mixture import STRENGTH_RANGE, STRENGTH_TAIL, tailed
from .model import Claim, RollRow, standing_of

BOUNDS = (0.50, 0.80, 0.95)
TOLD = 2
FARTHEST = 4.0  # sigma: displacements beyond are no measurement error
SHRUNK = (0.7, 0.5, 0.35, 0.25, 0.1)  # shares of the position error that are tried
MOST_DEX, DEX_STEP = 2.0, 0.1
ONE_LINE = 0.25  # dex: scatter of one line's predicted strength (oscillator strengths)
TOGETHER = 1.001  # chances of lines of one blend sum to at most this
UNLIKELY = 12.0  # cost (-ln of a chance) beyond which a fact is not worth telling
SIBLING = 2.3  # cost of a missing line being seen after all: one chance in ten
WANTED = -0.2  # ln: a line is wanted elsewhere where its freedom is below this


@dataclass(frozen=True)
class Fact:
    """words: the circumstance, to follow 'if'; probability: the claim's under it; standing:
    that probability's; cost: -ln of how likely the circumstance is, roughly, for ranking"""

    words: str
    probability: float
    standing: str
    cost: float

    def sentence(self) -> str:
        return f"if {self.words}: P {_chance(self.probability)}, {self.standing}"


@dataclass(frozen=True)
class Place:
    """The feature on trial and its surroundings.

    wave: vacuum Angstrom in the spectrum's frame; medium: for the words; roll: the species'
    row; others: (wave, claim) of the other features
    """

    wave: float
    medium: str = "vacuum"
    roll: RollRow | None = None
    others: tuple[tuple[float, Claim], ...] = ()


@dataclass(frozen=True)
class _Line:
    """A candidate with its breakdown; apart: feature less the line, Angstrom."""

    species: str
    wave: float
    share: float
    apart: float
    velocity: float
    weights: Breakdown

    @property
    def first(self) -> float:
        """Chance to be the main line of its blend."""
        return self.weights.first if self.weights.first >= 0 else self.share


class Trial:
    """A claim's odds, ready to be taken again.

    rest: odds of lines without a breakdown; more: the species' part of it, and of rounding
    sure: certainty of the velocity component behind the claim
    """

    def __init__(self, claim: Claim, species: str, place: Place):
        self.species, self.place = species, place
        self.lines = [
            _Line(
                c.species, c.wave, c.share, place.wave - c.wave * (1.0 + c.velocity / C_KM_S),
                c.velocity, Breakdown(*c.weights),
            )
            for c in claim.candidates
            if c.weights
        ]
        self.mine = np.array([line.species == species for line in self.lines], dtype=bool)
        self.odds = np.exp([min(line.weights.log_odds, 600.0) for line in self.lines])
        self.sure = max(_certainty(claim, _best(claim, self.odds)), 1e-9)
        total = 1.0 + float(np.sum(self.odds))
        unlisted = 1.0 - (1.0 - claim.p_unlisted) / self.sure
        unlisted = min(max(unlisted, 1e-6 / total), 1.0 / total)
        self.rest = 1.0 / unlisted - total
        self.more = 0.0
        if species == claim.species:
            own = float(np.sum(self.odds[self.mine]))
            self.more = min(claim.probability / (self.sure * unlisted), 1.0 / unlisted) - own

    def probability(self, odds=None, sure=None) -> float:
        """P(species) with these odds, (lines,)."""
        odds = self.odds if odds is None else odds
        sure = self.sure if sure is None else sure
        own = max(float(np.sum(odds[self.mine])) + self.more, 0.0)
        return float(sure * own / max(1.0 + np.sum(odds) + self.rest, own))

    @property
    def main(self) -> _Line:
        """The species' likeliest line."""
        return self.lines[int(np.argmax(np.where(self.mine, self.odds, -1.0)))]


def _best(claim: Claim, odds) -> tuple[float, float] | None:
    """(probability as stated, odds) of the likeliest candidate with a breakdown."""
    known = [c for c in claim.candidates if c.weights]
    if not known:
        return None
    i = int(np.argmax(odds))
    return known[i].probability, float(odds[i])


def _certainty(claim: Claim, weighed) -> float:
    """p = sure o u and p_unlisted = 1 - (1 - u) sure, with o the odds and u P(unlisted)."""
    if weighed is None or weighed[1] <= 0:
        return 1.0
    return float(np.clip(1.0 - claim.p_unlisted + weighed[0] / weighed[1], 0.0, 1.0))


def deciding_facts(claim: Claim, place: Place, species: str = "") -> tuple[Fact, ...]:
    """At most TOLD facts that would carry P(species) across the nearest bound.

    species: the claim's own where empty. Empty where the claim keeps no breakdown or where
    no single fact does it (see ``strongest_fact``).
    """
    trial = _trial(claim, place, species)
    if trial is None:
        return ()
    now = trial.probability()
    bound, rising = nearest_bound(now)
    found = [f for f in _facts(trial, bound, rising) if (f.probability >= bound) == rising]
    return tuple(sorted(found, key=lambda f: (f.cost, f.words))[:TOLD])


def strongest_fact(claim: Claim, place: Place, species: str = "") -> Fact | None:
    """The fact that moves the probability most towards the nearest bound, reaching it or not."""
    trial = _trial(claim, place, species)
    if trial is None:
        return None
    bound, rising = nearest_bound(trial.probability())
    found = [f for f in _facts(trial, bound, rising)]
    return max(found, key=lambda f: f.probability if rising else -f.probability, default=None)


def _trial(claim: Claim, place: Place, species: str) -> Trial | None:
    if claim.by != "machine" or not claim.candidates:
        return None
    trial = Trial(claim, species or claim.species, place)
    return trial if np.any(trial.mine) else None


def nearest_bound(probability: float) -> tuple[float, bool]:
    """(the bound nearest in log odds, whether it lies above)."""
    p = min(max(probability, 1e-6), 1.0 - 1e-6)
    own = np.log(p / (1.0 - p))
    away = [abs(np.log(b / (1.0 - b)) - own) for b in BOUNDS]
    bound = BOUNDS[int(np.argmin(away))]
    return bound, bool(probability < bound)


def _facts(trial: Trial, bound: float, rising: bool) -> Iterator[Fact]:
    for search in (_moved, _sharper, _stronger):
        fact = search(trial, bound, rising)
        if fact is not None and fact.cost <= UNLIKELY:
            yield fact
    for single in (_rival, _freed, _velocity, *_siblings(trial)):
        fact = single(trial)
        if fact is not None and fact.cost <= UNLIKELY:
            yield fact


def _fact(words: str, probability: float, cost: float) -> Fact:
    return Fact(words, probability, standing_of(probability), float(cost))


def _first(values, odds_of, trial: Trial, bound: float, rising: bool):
    """The first of the values whose odds cross the bound, else the one that comes nearest:
    (value, probability)."""
    best = None
    for value in values:
        p = trial.probability(odds_of(value))
        if (p >= bound) == rising:
            return value, p
        if best is None or (p > best[1]) == rising:
            best = (value, p)
    return best


def _place_again(trial: Trial, shift: float, shrink: float = 1.0):
    """Odds with the feature ``shift`` Angstrom redder and its own position error shrunk."""
    out = np.array(trial.odds)
    for i, line in enumerate(trial.lines):
        w = line.weights
        sigma = np.sqrt(max(w.sigma**2 - (1.0 - shrink**2) * w.own**2, 1e-8))
        weight = w.at_own

        def likely(move, s):
            return weight * tailed(line.apart + move, s) + (1 - weight) * tailed(w.blend + move, s)

        out[i] *= likely(shift, sigma) / max(likely(0.0, w.sigma), 1e-300)
    return out


def _moved(trial: Trial, bound: float, rising: bool) -> Fact | None:
    sigma = max(line.weights.sigma for line in trial.lines)
    steps = np.arange(1, 41) * (FARTHEST * sigma / 40)
    values = np.ravel(np.column_stack((steps, -steps)))
    shift, p = _first(values, lambda x: _place_again(trial, x), trial, bound, rising)
    side = "redder" if shift > 0 else "bluer"
    return _fact(f"it stood {abs(shift):.3f} Å {side}", p, 0.5 * (shift / sigma) ** 2)


def _sharper(trial: Trial, bound: float, rising: bool) -> Fact | None:
    own = trial.main.weights.own
    shrink, p = _first(SHRUNK, lambda x: _place_again(trial, 0.0, x), trial, bound, rising)
    words = f"it stood where it does with a position error of {shrink * own:.4f} Å, not {own:.4f} Å"
    return _fact(words, p, 1.0 - 2.0 * np.log(shrink))


def strength_odds(trial: Trial, dex: float):
    """Odds with the species' lines ``dex`` stronger than predicted from its other lines."""
    out = np.array(trial.odds)
    for i, line in enumerate(trial.lines):
        w = line.weights
        owner = line if trial.mine[i] else _partner(trial, line)
        if owner is None:
            continue
        raised = np.exp(owner.weights.keen * dex)
        soft = 1.0 + owner.first * (raised - 1.0)
        rise = np.log10(max(1.0 + owner.share * (10.0**dex - 1.0), 1e-6))
        gain = (raised if trial.mine[i] else 1.0) / max(soft, 1e-6)
        out[i] *= gain * np.exp(_readiness(w, rise)) * _strength_ratio(w, rise)
    return out


def _partner(trial: Trial, line: _Line) -> _Line | None:
    """The species' line in the blend of another species' line."""
    for other, mine in zip(trial.lines, trial.mine):
        near = abs(other.apart - line.apart) <= 2.0 * abs(line.apart - line.weights.blend) + 0.04
        if mine and near and other.first + line.first <= TOGETHER and line.first < 1.0:
            return other
    return None


def _readiness(w: Breakdown, dex: float) -> float:
    """Change of ln P(shows), straight beyond what was tried."""
    return dex / STEP * (w.stronger if dex > 0 else -w.weaker)


def _strength_ratio(w: Breakdown, dex: float) -> float:
    if w.scatter <= 0:
        return 1.0

    def likely(excess):
        z = excess / w.scatter
        peak = np.exp(-0.5 * z * z) / (w.scatter * np.sqrt(2 * np.pi))
        return (1 - STRENGTH_TAIL) * peak + STRENGTH_TAIL / STRENGTH_RANGE

    return float(likely(w.excess - w.slope * dex) / likely(w.excess))


def _stronger(trial: Trial, bound: float, rising: bool) -> Fact | None:
    error = trial.place.roll.offset_err if trial.place.roll else float("nan")
    error = np.hypot(error if np.isfinite(error) else 0.0, ONE_LINE)
    steps = np.arange(1, int(MOST_DEX / DEX_STEP) + 1) * DEX_STEP
    values = np.ravel(np.column_stack((steps, -steps)))
    dex, p = _first(values, lambda x: strength_odds(trial, x), trial, bound, rising)
    how = "stronger" if dex > 0 else "weaker"
    return _fact(f"{trial.species} were {abs(dex):.1f} dex {how} here", p, 0.5 * (dex / error) ** 2)


def _rival(trial: Trial) -> Fact | None:
    """The strongest line of another species out of the way."""
    rivals = np.where(trial.mine, 0.0, trial.odds)
    if not np.any(rivals > 0):
        return None
    line = trial.lines[int(np.argmax(rivals))]
    gone = np.array([x.species == line.species for x in trial.lines]) & ~trial.mine
    share = float(np.sum(trial.odds[gone]) / (1.0 + np.sum(trial.odds) + trial.rest))
    words = f"{line.species} {_wave(line.wave, trial)} were ruled out"
    return _fact(words, trial.probability(np.where(gone, 0.0, trial.odds)), -np.log1p(-min(share, 1 - 1e-9)))


def _freed(trial: Trial) -> Fact | None:
    """Another feature that wants the same line, made by something else."""
    line = trial.main
    if line.weights.free > WANTED:
        return None
    wave, chance = _taker(trial, line)
    if not np.isfinite(wave):
        return None
    odds = np.where(
        [x is line for x in trial.lines], trial.odds * np.exp(-line.weights.free), trial.odds
    )
    words = f"the feature at {_wave(wave, trial)} were not {line.species} {_wave(line.wave, trial)}"
    return _fact(words, trial.probability(odds), -np.log1p(-min(chance, 1 - 1e-9)))


def _taker(trial: Trial, line: _Line) -> tuple[float, float]:
    """(wave, probability) of the other feature that most wants a line."""
    best = (float("nan"), 0.0)
    for wave, claim in trial.place.others:
        for c in claim.candidates:
            if c.wave == line.wave and c.velocity == line.velocity and c.probability > best[1]:
                best = (wave, c.probability)
    return best


def _velocity(trial: Trial) -> Fact | None:
    if trial.sure >= 0.999:
        return None
    return _fact("the velocity were certain", trial.probability(sure=1.0), -np.log(max(trial.sure, 1e-9)))


def _siblings(trial: Trial):
    """Facts on other lines of the species: what one seen or missing would teach of its strength."""
    roll = trial.place.roll
    if roll is None or roll.species != trial.species:
        return
    for wave, depth, shift, words in (
        (roll.missing_wave, roll.missing_depth, roll.missing_shift, "its missing sibling {} were seen"),
        (roll.gap_wave, roll.gap_depth, roll.gap_shift, "its sibling {} outside the coverage were seen"),
    ):
        if np.isfinite(wave) and np.isfinite(shift):
            yield _sibling(wave, depth, shift, words)


def _sibling(wave: float, depth: float, shift: float, words: str):
    def fact(trial: Trial) -> Fact:
        name = f"{trial.species} {_wave(wave, trial)}"
        name += f" (expected depth {depth:.2f})" if np.isfinite(depth) else ""
        return _fact(words.format(name), trial.probability(strength_odds(trial, shift)), SIBLING)

    return fact


def _wave(wave: float, trial: Trial) -> str:
    return f"{float(to_medium(wave, trial.place.medium)):.2f}"


def _chance(p: float) -> str:
    return "over 0.99" if p > 0.995 else f"{p:.2f}"
