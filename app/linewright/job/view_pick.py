"""A place pointed at by hand: measured there, and weighed among its neighbours."""

from __future__ import annotations

from dataclasses import fields, replace

import numpy as np

from ..claims.identify import identify
from ..claims.options import ClaimOptions
from ..errors import InputRefused
from ..lines.loading import load_catalogue
from ..measure import measure_at, measure_spectrum
from ..measure.features import FeatureTable
from ..measure.options import MeasureOptions
from ..session.model import Claim, Session
from ..spectra.spectrum import Segment, Spectrum

SURROUNDINGS = 120  # line widths measured about it, for noise and continuum
LEAST_BY_HAND = 1.5
LEAST_SIGNIFICANCE = 2.5  # a person's eye has chosen the place: one trial, not thousands
NEIGHBOURS = 40  # features weighed with it


def surroundings(
    spectrum: Spectrum, session: Session, wave: float
) -> tuple[Spectrum, int] | None:
    """(the spectrum about a vacuum wavelength as one segment, its segment index).

    None where the spectrum has no samples. Small enough to be sent to another process.
    """
    index = segment_at(spectrum, wave)
    if index is None:
        return None
    cut = _cut(spectrum.segments[index], wave, session)
    return replace(spectrum, segments=(cut,)), index


def without_claims(session: Session) -> Session:
    """What ``weighed`` needs of a session: measurements, velocity and conditions."""
    return replace(session, claims=(), roll_call=(), orphans=(), history=())


def pick(
    about: Spectrum, index: int, wave: float, reach: float
) -> FeatureTable | None:
    """One-row table of the peak or trough within ``reach`` of a vacuum wavelength.

    about, index: from ``surroundings``. Measured as in a solve. None when nothing stands out.
    """
    try:
        found = measure_spectrum(about, MeasureOptions(threshold=LEAST_SIGNIFICANCE))
    except InputRefused:
        return None
    row = _nearest(found.features, wave, reach)
    if row is None:  # too faint to be found: fitted where the person points
        row = _nearest(measure_at(about, found, wave), wave, reach)
    if row is None or not row.significance[0] >= LEAST_BY_HAND:
        return None
    return replace(row, segment=np.array([index]), flags=(_by_hand(row.flags[0]),))


def _nearest(features: FeatureTable, wave: float, reach: float) -> FeatureTable | None:
    distance = np.abs(features.wave - wave)
    within = distance <= np.fmax(reach, np.nan_to_num(features.fwhm))
    if not np.any(within):
        return None
    return features.take([int(np.argmin(np.where(within, distance, np.inf)))])


def segment_at(spectrum: Spectrum, wave: float) -> int | None:
    """The segment with most samples about a wavelength; None outside all."""
    inside = [k for k, s in enumerate(spectrum.segments) if s.wave[0] <= wave <= s.wave[-1]]
    middle = {k: abs(0.5 * (spectrum.segments[k].wave[0] + spectrum.segments[k].wave[-1]) - wave)
              for k in inside}
    return min(middle, key=middle.get) if inside else None


def _by_hand(flags: str) -> str:
    return " ".join([*(w for w in flags.split() if w != "hand"), "hand"])


def _cut(segment: Segment, wave: float, session: Session) -> Segment:
    widths = session.features.fwhm[np.isfinite(session.features.fwhm)]
    step = float(np.median(np.diff(segment.wave)))
    width = float(np.median(widths)) if len(widths) else max(4.0 * step, wave / 40000.0)
    half = max(SURROUNDINGS * width / 2.0, 300 * step)
    part = slice(*np.searchsorted(segment.wave, [wave - half, wave + half]))
    sigma = segment.uncertainty
    return Segment(segment.wave[part], segment.flux[part],
                   None if sigma is None else sigma[part], segment.mask[part])


def weighed(session: Session, row: FeatureTable, frame: str, catalogue=None) -> Claim:
    """The machine's claim for a new feature, at the session's velocity and temperature.

    Weighed with the nearest features; no claim before a solve (``can_weigh``).
    """
    if not can_weigh(session):
        return Claim()
    together = _with_neighbours(session.features, row)
    at = int(np.nonzero(together.number == 0)[0][0])
    ends = float(together.wave[0]) - 0.5, float(together.wave[-1]) + 0.5
    options = ClaimOptions(
        velocity=session.velocity.velocity, temperature=session.temperature_k,
        log_pe=session.log_pe if np.isfinite(session.log_pe) else None, frame=frame,
        complete=False)
    catalogue = load_catalogue() if catalogue is None else catalogue
    return identify(together, (ends,), catalogue, options).claims[at]


def can_weigh(session: Session) -> bool:
    return bool(np.isfinite(session.temperature_k) and np.isfinite(session.velocity.velocity))


def with_claim(session: Session, number: int, claim: Claim) -> Session:
    """The machine's claim put to a feature that has none yet and was not judged since."""
    row = session.index_of(number)
    if session.claims[row] != Claim():
        return session
    return replace(session, claims=(*session.claims[:row], claim, *session.claims[row + 1:]))


def _with_neighbours(features: FeatureTable, row: FeatureTable) -> FeatureTable:
    """The nearest features of the segment and the new one, which gets number 0."""
    same = np.nonzero(features.segment == row.segment[0])[0]
    distance = np.abs(features.wave[same] - row.wave[0])
    chosen = np.sort(same[np.argsort(distance, kind="stable")[:NEIGHBOURS]])
    some = features.take(chosen)
    columns = {
        f.name: np.concatenate([getattr(some, f.name), getattr(row, f.name)])
        for f in fields(FeatureTable) if f.name not in ("flags", "number")
    }
    numbers = np.concatenate([some.number, [0]])
    joined = FeatureTable(**columns, number=numbers, flags=some.flags + row.flags)
    return joined.take(np.argsort(joined.wave, kind="stable"))
