"""Which features a figure names, and how."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from ..session.model import Claim, Session
from ..spectra.medium import to_medium
from .families import Family, family_of
from .notation import line_text

NAMED = ("firm", "likely", "tentative")
BLEND_SHARE = 0.2


@dataclass(frozen=True)
class Label:
    """A feature to be named: ``wave`` (own medium, Angstrom) is where the leader ends.

    importance: larger is dropped later
    """

    wave: float
    text: str
    standing: str
    family: Family
    importance: float


@dataclass(frozen=True)
class Marks:
    """What a range of the figure shows: labels, and wavelengths of features not named."""

    labels: tuple[Label, ...]
    unclaimed: np.ndarray
    set_aside: np.ndarray


def marks_between(session: Session, low: float, high: float) -> Marks:
    """Labels and bare ticks of the features between two own-medium wavelengths."""
    own = to_medium(session.features.wave, session.spectrum.medium)
    inside = np.flatnonzero((own >= low) & (own <= high))
    rows = inside[np.argsort(own[inside], kind="stable")]
    standing = np.array([session.claims[row].standing for row in rows], dtype=object)
    named = [row for row in rows if _is_named(session.claims[row])]
    labels = [_label(session, row, float(own[row])) for row in _without_repeats(session, named)]
    bare = np.array([not _is_named(session.claims[row]) for row in rows], dtype=bool)
    aside = standing == "set aside"
    return Marks(tuple(labels), own[rows[bare & ~aside]], own[rows[aside]])


def _is_named(claim: Claim) -> bool:
    return claim.standing in NAMED and bool(claim.species)


def _without_repeats(session: Session, rows: list) -> list:
    """One label where overlapping segments show the same line at the same place."""
    best: dict[tuple, int] = {}
    for row in rows:
        line = session.claims[row].line
        width = session.features.fwhm[row]
        cell = round(float(session.features.wave[row]) / (width if width > 0 else 0.1))
        key = (session.claims[row].species, line.wave if line else None, cell)
        other = best.get(key)
        if other is None or importance(session, row) > importance(session, other):
            best[key] = row
    chosen = set(best.values())
    return [row for row in rows if row in chosen]


def importance(session: Session, row: int) -> float:
    """A person's claims first, then by significance, or by depth where that is unknown."""
    significance = float(session.features.significance[row])
    if not math.isfinite(significance):
        depth = abs(float(session.features.depth[row]))
        significance = depth if math.isfinite(depth) else 0.0
    return significance + (1e9 if session.claims[row].by == "person" else 0.0)


def _label(session: Session, row: int, own: float) -> Label:
    claim = session.claims[row]
    wave = claim.line.wave if claim.line else math.nan
    lab = float(to_medium(wave, session.spectrum.medium)) if math.isfinite(wave) else math.nan
    blended = any(share >= BLEND_SHARE for _, _, share in claim.blend)
    return Label(
        own,
        line_text(claim.species, wave, lab, blended),
        claim.standing,
        family_of(claim.species, claim.origin),
        importance(session, row),
    )
