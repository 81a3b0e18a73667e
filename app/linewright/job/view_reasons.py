"""What speaks for and against a candidate, in words and from the session alone."""

from __future__ import annotations

import math
from dataclasses import dataclass

from ..session.model import Candidate, Claim, RollRow

NEAR, FAR = 1.5, 3.0  # sigma
SAME, DIFFERENT = 1.5, 3.0  # ratio of predicted to observed depth
FULL, MINOR = 0.7, 0.2  # share of the predicted opacity


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
        bad.append(f"only {c.share:.0%} of what is predicted here")


def _siblings(roll: RollRow, good: list, bad: list) -> None:
    if roll.verdict == "present":
        good.append(f"{roll.seen} {roll.species} lines seen, {roll.expected} expected")
    elif roll.verdict == "absent":
        bad.append(f"{roll.missing} of {roll.expected} expected {roll.species} lines are missing")
