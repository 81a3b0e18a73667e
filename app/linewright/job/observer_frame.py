"""What telluric and sky lines say: the frame's contradictions and the wavelength zero point.

Lines of the Earth's air stand at rest for the observer: at zero in a topocentric spectrum,
at the correction's own velocity after one was applied.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..claims.problem import inside
from ..claims.velocity import (
    TELLURIC_RANGES,
    strongest,
    typical_width,
    vote_sigma,
)
from ..claims.voting import Vote, line_weights, vote
from ..errors import InputRefused
from ..lines.catalogue import ORIGINS
from ..spectra.medium import C_KM_S

SPAN = (-130.0, 130.0)  # km/s: Earth's motion and the air-vacuum difference together
CLEAR = 8.0  # log-likelihood by which one shift must beat another
BROADEST = 33.0  # km/s FWHM: broader lines blend whole bands, and the answer is biased
MEDIUM_KMS = 82.6  # air against vacuum, 5900-9300 A


@dataclass(frozen=True)
class ZeroPoint:
    """velocity, error: km/s of lines that should stand still; lines: how many; kind."""

    velocity: float
    error: float
    lines: int
    kind: str

    def in_words(self) -> str:
        return f"{self.velocity:+.3f} +- {self.error:.3f} km/s from {self.lines} {self.kind} lines"


def _matches(features, catalogue, kind: str, centre: float):
    """(velocity, error) in km/s of isolated features beside one line of that origin."""
    width = max(typical_width(features), 0.5)
    wanted = catalogue.origin == ORIGINS.index(kind)
    if kind == "telluric":
        wanted &= np.nan_to_num(catalogue.depth_ref) > 0.02
        rows = (features.sign > 0) & inside(features.wave, TELLURIC_RANGES)
    else:
        rows = features.sign < 0
    lines, rows = np.sort(catalogue.wave[wanted]), np.flatnonzero(rows)
    if len(lines) < 2 or len(rows) == 0:
        return np.zeros(0), np.zeros(0)
    expected = lines * (1 + centre / C_KM_S)
    at = np.clip(np.searchsorted(expected, features.wave[rows]), 1, len(expected) - 1)
    nearest = np.where(np.abs(expected[at] - features.wave[rows])
                       < np.abs(expected[at - 1] - features.wave[rows]), at, at - 1)
    velocity = C_KM_S * (features.wave[rows] / lines[nearest] - 1.0)
    error = C_KM_S * features.wave_err[rows] / features.wave[rows]
    close = (np.abs(velocity - centre) < 0.5 * width) & np.isfinite(error)
    return velocity[close], np.maximum(error[close], 0.02)


def _robust(velocity, error, kind: str) -> ZeroPoint | None:
    """Median, with the scatter of the lines themselves as its error."""
    if len(velocity) < 5:
        return None
    middle = float(np.median(velocity))
    keep = np.abs(velocity - middle) < 4 * max(1.4826 * np.median(np.abs(velocity - middle)), 0.05)
    weight = 1.0 / (error[keep] ** 2 + np.var(velocity[keep]))
    mean = float(np.sum(weight * velocity[keep]) / np.sum(weight))
    return ZeroPoint(mean, float(1.0 / np.sqrt(np.sum(weight))), int(keep.sum()), kind)


def _clear(found: Vote) -> bool:
    """Whether one shift beats every other; where there is nothing to compare, it does not."""
    return bool(np.isfinite(found.velocity) and found.rivals and found.rivals[0][1] >= CLEAR)


def _telluric_vote(features, catalogue) -> Vote:
    """Features in telluric bands against the telluric list; every shift is as likely, since a
    wrong medium puts the lines 83 km/s off."""
    rows = strongest(features, 1, 400, where=inside(features.wave, TELLURIC_RANGES))
    listed = catalogue.take(np.flatnonzero(catalogue.origin == ORIGINS.index("telluric")))
    if len(rows) < 5 or len(listed) < 5 or typical_width(features) > BROADEST:
        return Vote(float("nan"), float("nan"), 0.0, (), np.zeros(2), np.zeros(2))
    reach = 1 + 1.1 * SPAN[1] / C_KM_S
    wave = features.wave[rows]
    near = listed.between(wave.min() / reach, wave.max() * reach)
    weight = line_weights(np.log10(near.depth_ref), 1.5 * len(rows))
    keep = weight > 0.01
    return vote((wave, vote_sigma(features, rows)), (near.wave[keep], weight[keep]), SPAN)


def _sky_vote(features, catalogue) -> Vote:
    lines = np.sort(catalogue.wave[catalogue.origin == ORIGINS.index("sky")])
    rows = strongest(features, -1, 100)
    if len(rows) < 5 or len(lines) < 5 or typical_width(features) > BROADEST:
        return Vote(float("nan"), float("nan"), 0.0, (), np.zeros(2), np.zeros(2))
    weight = np.full(len(lines), 0.5)
    return vote((features.wave[rows], vote_sigma(features, rows)), (lines, weight), SPAN)


def observer_lines(features, catalogue) -> ZeroPoint | None:
    """Where telluric absorption stands, else night-sky emission; None when neither is clear."""
    votes = (("telluric", lambda: _telluric_vote(features, catalogue)),
             ("sky", lambda: _sky_vote(features, catalogue)))
    for kind, cast in votes:
        found = cast()
        if _clear(found):
            result = _robust(*_matches(features, catalogue, kind, found.velocity), kind)
            if result is not None:
                return result
    return None


def measured_zero_point(spectrum, features, catalogue) -> ZeroPoint:
    """The wavelength zero point of a spectrum in a known frame.

    Raises InputRefused when no line of the Earth's air is clear, or when the spectrum was
    corrected by a number nothing states.
    """
    what = spectrum.path or spectrum.name or "spectrum"
    expected = _expected(spectrum)
    if expected is None:
        raise InputRefused(what, f"frame {spectrum.frame}: where the Earth's air should stand is "
                           "not known", "say --frame topocentric if it was not corrected")
    found = observer_lines(features, catalogue)
    if found is None:
        raise InputRefused(what, "shows no clear telluric or sky lines",
                           "give the zero point as --zero-point VALUE:ERROR")
    relative = C_KM_S * ((1 + found.velocity / C_KM_S) / (1 + expected / C_KM_S) - 1)
    return ZeroPoint(relative, found.error, found.lines, found.kind)


def _expected(spectrum) -> float | None:
    """km/s at which the stated frame puts telluric lines; None when it does not say."""
    if spectrum.frame in ("topocentric", "geocentric"):
        return 0.0
    known = float(spectrum.observer_velocity)
    return known if np.isfinite(known) and spectrum.frame != "rest" else None


def frame_doubts(spectrum, features, catalogue) -> tuple[str, ...]:
    """Where telluric lines contradict the stated frame or medium, in words."""
    expected = _expected(spectrum)
    corrected = spectrum.frame in ("heliocentric", "barycentric")
    if expected is None and not corrected and spectrum.frame != "unknown":
        return ()
    found = _telluric_vote(features, catalogue)
    if not _clear(found):
        return ()
    return tuple(_doubt(spectrum, found, expected, max(1.0, 0.1 * typical_width(features))))


def _score_near(found, velocity: float, reach: float) -> float:
    near = np.abs(found.grid - velocity) <= reach
    return float(found.score[near].max()) if np.any(near) else -np.inf


def _doubt(spectrum, found, expected, reach: float):
    where = f"telluric lines stand at {found.velocity:+.1f} km/s"
    if expected is None:
        if abs(found.velocity) < reach and spectrum.frame == "unknown":
            yield f"{where}: the wavelengths look uncorrected (topocentric)"
        return
    best = float(found.score.max())
    if best - _score_near(found, expected, 2 * reach) < CLEAR:
        return
    off = found.velocity - expected
    if abs(abs(off) - MEDIUM_KMS) < 2.0 + reach:
        other = "vacuum" if spectrum.medium == "air" else "air"
        yield (f"medium {spectrum.medium} ({spectrum.medium_from}), but {where}, as if the "
               f"wavelengths were {other}")
    elif expected and abs(found.velocity) < 2 * reach:
        yield (f"frame {spectrum.frame} ({spectrum.frame_from}), but {where}: the correction of "
               f"{expected:+.2f} km/s seems not applied")
    else:
        yield (f"frame {spectrum.frame} ({spectrum.frame_from}), but {where} instead of "
               f"{expected:+.1f}")
