"""A Roll-call row in words: the verdict, its limit, the offset and what to make of it."""

from __future__ import annotations

import math
from collections import Counter

from ..session.model import RollRow, Session
from ..spectra.medium import to_medium

FEW = 3  # lines below which an offset rests on too little
CERTAIN = 0.15  # dex: offsets known worse are said to be so
LIKE_CHANCE = 0.3  # p above which a fit is called chance's
ELSEWHERE = {
    "nebular": "the emission predicted of a nebula",
    "telluric": "the depths of the list's air",
    "sky": "the list's relative brightness",
    "interstellar": "the strengths assumed of a cloud",
}
PRIOR = 0.35  # dex: an error this large is the prior's own: the lines taught nothing


def verdict_words(row: RollRow, session: Session) -> tuple[str, ...]:
    """Sentences on one species, the verdict first."""
    said = [_verdict(row)]
    said += _limit(row, session.spectrum.medium)
    said += _offset(row, session)
    said += _missing(row, session.spectrum.medium)
    return tuple(said)


def _verdict(row: RollRow) -> str:
    said = f"{row.species} is {row.verdict}: "
    if row.verdict == "not testable":
        few = f"{row.expected} of its lines" if row.expected else "none of its lines"
        return f"{said}{few} would show here for certain, too few to tell"
    if row.verdict == "absent":
        if row.expected:
            return f"{said}none of {row.expected} expected lines is seen"
        return f"{said}no line is seen, though some of its many faint ones should be"
    seen = f"{said}{row.seen} of {row.expected} expected lines seen"
    if row.p_chance > LIKE_CHANCE:
        return f"{seen}, not more or better placed than chance gives"
    chance = "below 1e-10" if row.p_chance < 1e-10 else f"{row.p_chance:.1g}"
    return (f"{seen}; chance would fit lines so well with probability {chance}, judged on features "
            "nothing else explains, all species tried counted")


def _limit(row: RollRow, medium: str) -> list[str]:
    if not math.isfinite(row.limit_dex):
        return []
    wave = float(to_medium(row.limit_wave, medium))
    return [
        f"not seen: its strength lies below {row.limit_dex:+.1f} dex of the prediction, since "
        f"{row.species} {wave:.2f} would show above {row.limit_ew:.1f} mÅ"
    ]


def _offset(row: RollRow, session: Session) -> list[str]:
    if not (math.isfinite(row.offset_dex) and math.isfinite(row.offset_err)) or row.seen == 0:
        return []
    if row.offset_err >= PRIOR:
        return ["its strength offset is not known: the lines seen teach nothing of it"]
    said = [
        f"its lines are {row.offset_dex:+.2f} ± {row.offset_err:.2f} dex from "
        f"{_predicted(row.species, session)}"
    ]
    doubts = []
    if row.seen < FEW:
        doubts.append(f"it rests on {row.seen} line{'s' if row.seen > 1 else ''}")
    if row.offset_err > CERTAIN:
        doubts.append("the error is large")
    doubts.append(
        "it is no abundance: it holds errors of oscillator strengths, of temperature and "
        "pressure, of blends and of strong lines"
    )
    return [*said, "; ".join(doubts)]


def _predicted(species: str, session: Session) -> str:
    """Which strengths a species' lines are compared with, by where most of them arise."""
    origins = Counter(c.origin for c in session.claims if c.species == species and c.probability > 0.5)
    origin = origins.most_common(1)[0][0] if origins else "stellar"
    if origin in ELSEWHERE:
        return ELSEWHERE[origin]
    return f"the strengths of solar abundances{_conditions(session)}"


def _conditions(session: Session) -> str:
    t, pe = session.temperature_k, session.log_pe
    if not math.isfinite(t):
        return ""
    pressure = f" and log Pe {pe:.1f}" if math.isfinite(pe) else ""
    return f" at {t:.0f} K{pressure}"


def _missing(row: RollRow, medium: str) -> list[str]:
    if not row.missing or not math.isfinite(row.missing_wave):
        return []
    wave = float(to_medium(row.missing_wave, medium))
    depth = f", expected {row.missing_depth:.2f} deep" if math.isfinite(row.missing_depth) else ""
    return [f"the strongest line missing is {wave:.2f}{depth}"]
