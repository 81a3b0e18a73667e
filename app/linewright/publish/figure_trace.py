"""The spectrum and its continuum as polylines of print resolution."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..session.model import Session
from ..spectra.medium import to_medium
from ..spectra.spectrum import Segment, Spectrum

GAP_FACTOR = 3.5
DOTS_PER_POINT = 1200 / 72


@dataclass(frozen=True)
class Trace:
    """A polyline of one segment: own-medium Angstrom and flux, NaN where it breaks."""

    wave: np.ndarray
    flux: np.ndarray


def traces(spectrum: Spectrum, medium: str, low: float, high: float, points: float) -> list[Trace]:
    """One polyline a segment between two own-medium wavelengths, on ``points`` of paper.

    Samples closer than 1/1200 inch are drawn by their extremes, which prints the same.
    """
    found = []
    for segment in spectrum.segments:
        wave, flux = _broken(segment, to_medium(segment.wave, medium), low, high)
        if len(wave):
            found.append(Trace(*_thinned(wave, flux, low, high, points * DOTS_PER_POINT)))
    return found


def _broken(segment: Segment, wave, low: float, high: float):
    """Samples in range with one outside on each side; NaN at masked samples and gaps."""
    first, last = np.searchsorted(wave, [low, high])
    part = slice(max(first - 1, 0), last + 1)
    wave = wave[part]
    flux = np.where(segment.mask[part], np.nan, segment.flux[part]).astype(float)
    if len(wave) < 2 or last <= first:
        return wave[:0], flux[:0]
    steps = np.diff(wave)
    gaps = np.flatnonzero(steps > GAP_FACTOR * np.median(steps))
    middle = 0.5 * (wave[gaps] + wave[gaps + 1])
    return np.insert(wave, gaps + 1, middle), np.insert(flux, gaps + 1, np.nan)


def _thinned(wave, flux, low: float, high: float, columns: float):
    """First, lowest, highest and last sample of each printer's column."""
    if len(wave) <= 4 * columns:
        return wave, flux
    column = np.floor((wave - low) / (high - low) * columns).astype(int)
    starts = np.flatnonzero(np.diff(column, prepend=column[0] - 1))
    keep = set()
    for begin, end in zip(starts, [*starts[1:], len(wave)], strict=True):
        piece = flux[begin:end]
        keep |= {begin, end - 1, *(begin + np.flatnonzero(np.isnan(piece))[:1])}
        if not np.isnan(piece).all():
            keep |= {begin + int(np.nanargmin(piece)), begin + int(np.nanargmax(piece))}
    chosen = np.array(sorted(keep))
    return wave[chosen], flux[chosen]


def continuum_traces(session: Session, low: float, high: float) -> list[Trace]:
    """The pseudo-continuum of each segment between two own-medium wavelengths, where the
    spectrum was seen: it is not drawn across gaps."""
    medium = session.spectrum.medium
    seen = [to_medium(np.array(r), medium) for r in session.spectrum.coverage] or [(low, high)]
    found = []
    for nodes in session.continuum:
        own = to_medium(nodes.wave, medium)
        for start, stop in seen:
            ends = np.clip([max(low, start), min(high, stop)], own[0], own[-1])
            if len(own) < 2 or ends[1] <= ends[0]:
                continue
            inside = own[(own > ends[0]) & (own < ends[1])]
            wave = np.array([ends[0], *inside, ends[1]])
            found.append(Trace(wave, np.interp(wave, own, nodes.value)))
    return found


def stick_traces(session: Session, low: float, high: float) -> list[Trace]:
    """Without a spectrum: each feature a stick from 1 to 1 - depth (0.2 where unknown)."""
    own = to_medium(session.features.wave, session.spectrum.medium)
    inside = (own >= low) & (own <= high)
    depth = np.where(
        np.isfinite(session.features.depth), session.features.depth, 0.2 * session.features.sign
    )
    order = np.flatnonzero(inside)[np.argsort(own[inside])]
    wave, flux = [low], [1.0]
    for row in order:
        wave += [own[row]] * 3
        flux += [1.0, 1.0 - depth[row], 1.0]
    return [Trace(np.array([*wave, high]), np.array([*flux, 1.0]))]
