"""A session's features as arrays for drawing, in own-medium wavelengths."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ...session.model import STANDINGS, Claim, Session
from ...spectra.medium import to_medium

FIRM, LIKELY, TENTATIVE, UNCLAIMED, SET_ASIDE = range(len(STANDINGS))
_WEIGHT = np.array([2.0, 1.0, 0.0, -9.0, -9.0])


@dataclass(frozen=True, eq=False)
class FeatureMarks:
    """Features in order of wavelength, arrays of shape (n,).

    wave: own-medium Angstrom; number: permanent ids; standing: index into STANDINGS
    species, origin: of the claim; text: label, empty where nothing is claimed; short: the
        label without its wavelength
    importance: orders labels that compete for room
    """

    wave: np.ndarray
    number: np.ndarray
    standing: np.ndarray
    species: tuple[str, ...]
    origin: tuple[str, ...]
    text: tuple[str, ...]
    short: tuple[str, ...]
    importance: np.ndarray

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
    claims = [session.claims[i] for i in order]
    standing = np.array([STANDINGS.index(c.standing) for c in claims])
    significance = np.nan_to_num(np.abs(features.significance[order]), nan=1.0)
    shown = _shown_waves(claims, features.wave[order], medium)
    return FeatureMarks(
        wave=to_medium(features.wave[order], medium),
        number=features.number[order],
        standing=standing,
        species=tuple(c.species for c in claims),
        origin=tuple(c.origin for c in claims),
        text=tuple(_text(claim, wave) for claim, wave in zip(claims, shown)),
        short=tuple(_text(claim, None) for claim in claims),
        importance=np.log10(np.maximum(significance, 1.0)) + _WEIGHT[standing],
    )


def _shown_waves(claims: list[Claim], wave: np.ndarray, medium: str) -> list[float]:
    line = [c.line.wave if c.line is not None else w for c, w in zip(claims, wave)]
    return to_medium(np.array(line, dtype=float), medium).tolist()


def _text(claim: Claim, wave: float | None) -> str:
    if not claim.species or claim.standing in ("unclaimed", "set aside"):
        return ""
    doubt = " ?" if claim.standing == "tentative" else ""
    number = "" if wave is None else f" {wave:.2f}"
    return f"{claim.species}{number}{doubt}"
