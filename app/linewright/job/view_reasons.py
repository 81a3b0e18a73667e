"""What speaks for and against a candidate, in words and from the session alone."""

from __future__ import annotations

import math
from dataclasses import dataclass

from ..claims.facts import Fact, Place, deciding_facts, strongest_fact
from ..session.model import Candidate, Claim, RollRow, Session

NEAR, FAR = 1.5, 3.0  # sigma
SAME, DIFFERENT = 1.5, 3.0  # ratio of predicted to observed depth
FULL, MINOR = 0.7, 0.2  # share of the predicted opacity
NEIGHBOURS = 6  # features on either side that may want the same line


@dataclass(frozen=True)
class Reasons:
    """Short sentences, strongest first."""

    for_it: tuple[str, ...]
    against: tuple[str, ...]


def reasons(
    candidate: Candidate, claim: Claim, depth: float, roll: RollRow | None = None
) -> Reasons:
    """Words for the numbers of one candidate of a feature with this observed depth."""
    good: list[str] = []
    bad: list[str] = []
    for judge in (_position, _strength, _share):
        judge(candidate, depth, good, bad)
    if roll is not None:
        _siblings(roll, good, bad)
    if claim.p_unlisted > 0.2:
        chance = "more than 0.99" if claim.p_unlisted > 0.995 else f"{claim.p_unlisted:.2f}"
        bad.append(f"no listed line made it, with probability {chance}")
    return Reasons(tuple(good), tuple(bad))


@dataclass(frozen=True)
class WhatChanges:
    """What would change a verdict: ``words`` is one sentence each, most likely first.

    decisive: False where no single fact does and the sentence tells the one that goes
    furthest; facts: the same with their probabilities
    """

    words: tuple[str, ...]
    facts: tuple[Fact, ...]
    decisive: bool


def what_would_change(session: Session, row: int, species: str = "") -> WhatChanges:
    """The one or two facts that would carry a feature's probability across the nearest bound.

    row: of the session's features; species: the claim's own where empty. Nothing where a
    person decided, where no line comes near, and in sessions that keep no breakdown.
    """
    claim, f = session.claims[row], session.features
    wanted = species or claim.species
    roll = next((r for r in session.roll_call if r.species == wanted), None)
    near = range(max(row - NEIGHBOURS, 0), min(row + NEIGHBOURS + 1, len(f)))
    others = tuple((float(f.wave[i]), session.claims[i]) for i in near if i != row)
    place = Place(float(f.wave[row]), session.spectrum.medium, roll, others)
    facts = deciding_facts(claim, place, species)
    if facts:
        return WhatChanges(tuple(f.sentence() for f in facts), facts, True)
    furthest = strongest_fact(claim, place, species)
    if furthest is None:
        return WhatChanges((), (), False)
    words = f"no single fact would change it; the one that counts most: {furthest.sentence()}"
    return WhatChanges((words,), (furthest,), False)


def _position(c: Candidate, _depth: float, good: list, bad: list) -> None:
    off = abs(c.offset_sigma)
    if off <= NEAR:
        good.append("stands where it should")
    elif off >= FAR:
        bad.append("stands too far from its place")


def _strength(c: Candidate, depth: float, good: list, bad: list) -> None:
    predicted = c.depth_predicted
    if not (math.isfinite(predicted) and math.isfinite(depth)) or not predicted or not depth:
        return
    if predicted * depth < 0:
        bad.append("predicted in absorption, seen in emission" if depth < 0 else
                   "predicted in emission, seen in absorption")
        return
    ratio = depth / predicted
    if 1 / SAME <= ratio <= SAME:
        good.append("as deep as predicted")
    elif ratio >= DIFFERENT:
        bad.append(f"seen {ratio:.0f} times deeper than predicted")
    elif ratio <= 1 / DIFFERENT:
        bad.append(f"predicted {1 / ratio:.0f} times deeper than seen")


def _share(c: Candidate, _depth: float, good: list, bad: list) -> None:
    if c.share >= FULL:
        good.append("hardly anything else is predicted here")
    elif c.share <= MINOR:
        part = f"{c.share:.0%}" if c.share >= 0.01 else "less than 1%"
        bad.append(f"only {part} of what is predicted here")


def _siblings(roll: RollRow, good: list, bad: list) -> None:
    if roll.verdict == "present":
        good.append(f"{roll.seen} {roll.species} lines seen, {roll.expected} expected")
    elif roll.verdict == "absent":
        bad.append(f"{roll.missing} of {roll.expected} expected {roll.species} lines are missing")
