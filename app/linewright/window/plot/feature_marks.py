"""A session's features as arrays for drawing, in own-medium wavelengths."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ...session.model import STANDINGS, Claim, Session
from ...spectra.medium import to_medium

_CODE = {name: code for code, name in enumerate(STANDINGS)}
FIRM, LIKELY, TENTATIVE, UNCLAIMED, SET_ASIDE = range(len(STANDINGS))
_WEIGHT = np.array([2.0, 1.0, 0.0, -9.0, -9.0])
_FEW = 100  # changed claims that are taken over one by one


@dataclass(frozen=True, eq=False)
class FeatureMarks:
    """Features in order of wavelength, arrays of shape (n,).

    wave: own-medium Angstrom; number: permanent ids; standing: index into STANDINGS
    species, origin: of the claim; text: label, empty where nothing is claimed; short: the
        label without its wavelength
    importance: orders labels that compete for room
    source: (features, claims, order, medium) these were made of
    """

    wave: np.ndarray
    number: np.ndarray
    standing: np.ndarray
    species: tuple[str, ...]
    origin: tuple[str, ...]
    text: tuple[str, ...]
    short: tuple[str, ...]
    importance: np.ndarray
    source: tuple = (None, (), None, "")

    def __len__(self) -> int:
        return len(self.wave)

    def row_of(self, number: int | None) -> int | None:
        """Row of a feature number, None when it is not there."""
        rows = np.nonzero(self.number == number)[0] if number is not None else ()
        return int(rows[0]) if len(rows) else None

    def nearest(self, wave: float, within: float) -> int | None:
        """Row of the feature nearest to ``wave`` if closer than ``within`` Angstrom."""
        if len(self) == 0:
            return None
        row = int(np.argmin(np.abs(self.wave - wave)))
        return row if abs(self.wave[row] - wave) <= within else None


def no_marks() -> FeatureMarks:
    nothing = np.zeros(0)
    whole = nothing.astype(int)
    return FeatureMarks(nothing, whole, whole, (), (), (), (), nothing)


def marks_of(session: Session | None, medium: str) -> FeatureMarks:
    """Features and claims of a session, ready to draw in ``medium``."""
    if session is None or len(session.features) == 0:
        return no_marks()
    features = session.features
    order = np.argsort(features.wave, kind="stable")
    claims = [session.claims[i] for i in order.tolist()]
    standing = np.array([_CODE[c.standing] for c in claims])
    wave = features.wave[order]
    shown = _shown_waves(claims, wave, medium)
    return FeatureMarks(
        wave=to_medium(wave, medium),
        number=features.number[order],
        standing=standing,
        species=tuple(c.species for c in claims),
        origin=tuple(c.origin for c in claims),
        text=tuple(_text(claim, wave) for claim, wave in zip(claims, shown)),
        short=tuple(_text(claim, None) for claim in claims),
        importance=_importance(features.significance[order], standing),
        source=(features, session.claims, order, medium),
    )


def marks_after(
    old: FeatureMarks, session: Session | None, medium: str
) -> tuple[FeatureMarks, np.ndarray | None]:
    """(marks of ``session``, their rows that differ from ``old``; None when all may).

    After an edit of a few claims only those are made anew.
    """
    features, claims, order, known = old.source
    if session is None or features is not session.features or known != medium:
        return marks_of(session, medium), None
    changed = [k for k, (a, b) in enumerate(zip(claims, session.claims)) if a is not b]
    if len(changed) > _FEW:
        return marks_of(session, medium), None
    rows = np.nonzero(np.isin(order, changed))[0]
    return _with_claims(old, session, rows), rows


def _with_claims(old: FeatureMarks, session: Session, rows: np.ndarray) -> FeatureMarks:
    features, _claims, order, medium = old.source
    source = (features, session.claims, order, medium)
    if not len(rows):
        return replace(old, source=source)
    at = order[rows]
    claims = [session.claims[i] for i in at.tolist()]
    standing, importance = old.standing.copy(), old.importance.copy()
    standing[rows] = [_CODE[c.standing] for c in claims]
    importance[rows] = _importance(features.significance[at], standing[rows])
    shown = _shown_waves(claims, features.wave[at], medium)
    return replace(
        old, standing=standing, importance=importance, source=source,
        species=_put(old.species, rows, (c.species for c in claims)),
        origin=_put(old.origin, rows, (c.origin for c in claims)),
        text=_put(old.text, rows, map(_text, claims, shown)),
        short=_put(old.short, rows, (_text(c, None) for c in claims)),
    )


def _put(old: tuple[str, ...], rows: np.ndarray, new) -> tuple[str, ...]:
    words = list(old)
    for row, word in zip(rows.tolist(), new):
        words[row] = word
    return tuple(words)


def _importance(significance: np.ndarray, standing: np.ndarray) -> np.ndarray:
    size = np.nan_to_num(np.abs(significance), nan=1.0)
    return np.log10(np.maximum(size, 1.0)) + _WEIGHT[standing]


def _shown_waves(claims: list[Claim], wave: np.ndarray, medium: str) -> list[float]:
    line = [c.line.wave if c.line is not None else w for c, w in zip(claims, wave)]
    return to_medium(np.array(line, dtype=float), medium).tolist()


def _text(claim: Claim, wave: float | None) -> str:
    if not claim.species or claim.standing in ("unclaimed", "set aside"):
        return ""
    doubt = " ?" if claim.standing == "tentative" else ""
    number = "" if wave is None else f" {wave:.2f}"
    return f"{claim.species}{number}{doubt}"
