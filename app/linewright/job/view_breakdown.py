"""The factors of a candidate's odds, named and put in words."""

from __future__ import annotations

import math
from dataclasses import dataclass

from ..claims.breakdown import Breakdown
from ..session.model import Candidate, RollRow
from ..spectra.medium import to_medium


@dataclass(frozen=True)
class Term:
    """One factor of the odds against 'no listed line': its natural logarithm, and words."""

    name: str
    log: float
    words: str

    @property
    def factor(self) -> str:
        """'×340' for, '÷12' against, '×1' neither."""
        return factor_text(self.log)


def factor_text(log: float) -> str:
    size = math.exp(min(abs(log), 40.0))
    digits = f"{size:.0f}" if size >= 9.95 else f"{size:.1f}"
    if size >= 9.5e4:
        digits = f"10^{math.log10(size):.0f}"
    return "×1" if digits == "1.0" else f"{'×' if log > 0 else '÷'}{digits}"


def terms(candidate: Candidate) -> tuple[Term, ...]:
    """shows, place, strength, free, and star against air where both meet; empty where the session keeps no breakdown."""
    if not candidate.weights:
        return ()
    b, name = Breakdown(*candidate.weights), candidate.species
    shared = (Term("star and air", b.between, _side(
        b.between, "what the depth leaves for star and air favours it {} times",
        "what the depth leaves for star and air speaks {} times against it")),)
    return (
        Term("shows", b.show, _show(b.show, name)),
        Term("place", b.place, _side(
            b.place, "stands {} times better here than an unlisted line would",
            "stands {} times worse here than an unlisted line would")),
        Term("strength", b.strength, _strength(b)),
        Term("free", b.free, _side(
            b.free, "no other feature wants this line", "other features want this line too: "
            "{} times less free") if b.free < -0.05 else "no other feature wants this line"),
    ) + (shared if abs(b.between) > 0.05 else ())


def _times(log: float) -> str:
    return factor_text(log).lstrip("×÷")


def _side(log: float, good: str, bad: str) -> str:
    return (good if log >= 0 else bad).format(_times(log))


def _show(log: float, name: str) -> str:
    return _side(log, f"a {name} line this strong is {{}} times likelier to show than to stay away",
                 f"a {name} line this weak is {{}} times likelier to stay away than to show")


def _strength(b: Breakdown) -> str:
    said = _side(b.strength, "its strength fits {} times better than an unlisted line's",
                 "its strength fits {} times worse than an unlisted line's")
    if not b.scatter > 0:
        return "no strength is predicted or measured"
    return f"{said}: {b.excess:+.2f} dex from the expected, which scatters by {b.scatter:.2f}"


def siblings_words(roll: RollRow | None, medium: str) -> tuple[str, str]:
    """The species' other lines: how many of the expected are seen; and the strongest one that
    is missing and that lies outside the coverage."""
    if roll is None or not roll.expected:
        return "", ""
    gone = roll.missing_wave if roll.missing else math.nan
    lines = [_line("missing", gone, medium), _line("outside", roll.gap_wave, medium)]
    return f"{roll.seen} of {roll.expected} seen", " · ".join(filter(None, lines))


def _line(words: str, wave: float, medium: str) -> str:
    return f"{words} {float(to_medium(wave, medium)):.2f}" if math.isfinite(wave) else ""
