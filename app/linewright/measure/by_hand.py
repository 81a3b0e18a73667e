"""Picking a feature by hand and drawing fitted profiles."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..errors import InputRefused
from ..spectra.spectrum import Segment
from .detect import run_filters
from .drawn import absorbed, level_of
from .finding import Found
from .gauss import FWHM_PER_SIGMA
from .groups import Trace, component_sum, fit_features
from .guess import first_guess
from .stretches import usable
from .table import fitted_table
from .veil import running_mean, veil

AROUND = 60.0  # line widths of spectrum looked at on either side of a pick
SNAP = 2.0  # line widths within which a pick goes to the nearest extremum
SIGNS = {"absorption": 1, "emission": -1}


def measure_at(spectrum, measurement, wave_vac: float, kind: str | None = None):
    """One feature where a person points: a FeatureTable of one row, flagged 'hand'.

    measurement: the Measurement of this spectrum (continuum, noise and widths are taken
    from it; its own features nearby are subtracted); wave_vac: vacuum Angstrom; kind:
    'absorption', 'emission' or None for the nearer extremum. Raises InputRefused where
    the spectrum has no usable samples.
    """
    number = segment_at(spectrum, measurement, wave_vac)
    trace = local_trace(spectrum.segments[number], measurement.segments[number], wave_vac)
    limits = np.array([[0, len(trace.wave)]])
    pixels = trace.width / np.gradient(trace.wave)
    smooth = int(max(1, np.round(0.3 * np.median(pixels))))
    index, sign = _snap(trace, wave_vac, SIGNS.get(kind), smooth)
    others = _others(measurement.features, number, trace, trace.wave[index])
    cleared = replace(trace, y=trace.y - component_sum(trace.wave, others))
    at, signs = np.array([index]), np.array([sign])
    own = np.zeros(1, dtype=bool)
    start = first_guess(cleared, at, signs, own, smooth)
    fitted = fit_features(cleared, start, limits, np.zeros(1, dtype=int), own)
    level = run_filters(trace.y, trace.noise, trace.good, pixels, trace.correlation,
                        trace.level_err).level[index]
    found = Found(at, signs, np.array([sign * level]), limits, own, own, start)
    table = fitted_table(cleared, measurement.segments[number], found, fitted, number)
    return replace(table, flags=tuple(f"{f} hand".strip() for f in table.flags))


def fit_profile(features, row: int, points: int = 121, neighbours: bool = False):
    """(wave, flux) of a fitted profile for drawing, each (points,).

    features: FeatureTable; row: its row; wave: vacuum Angstrom over three FWHM on either
    side; flux: in the spectrum's unit, from the row's continuum; neighbours: draw the sum
    with every other fitted feature of the segment.
    """
    centre, fwhm = float(features.wave[row]), float(features.fwhm[row])
    wave = np.linspace(centre - 3.0 * fwhm, centre + 3.0 * fwhm, points)
    near = np.array([row])
    if neighbours:
        reach = 3.0 * (fwhm + np.nan_to_num(features.fwhm))
        near = np.flatnonzero(
            (features.segment == features.segment[row])
            & (np.abs(features.wave - centre) < reach)
            & np.isfinite(features.fwhm) & np.isfinite(features.depth)
        )
        # an integrated line has no profile; what it takes is in the continuum of its lines
        near = near[[i == row or "integrated" not in features.flags[i].split() for i in near]]
    return wave, level_of(features, near, row) * (1.0 - absorbed(features, near, wave))


def segment_at(spectrum, measurement, wave: float) -> int:
    """Segment that shows a vacuum wavelength best; InputRefused where none does."""
    inside = [
        i for i, (s, m) in enumerate(zip(spectrum.segments, measurement.segments, strict=True))
        if m is not None and s.wave[0] <= wave <= s.wave[-1]
    ]
    if not inside:
        raise InputRefused(
            f"{wave:.3f} A (vacuum)", "lies outside the measured spectrum",
            "point at a place the spectrum covers",
        )
    # where orders overlap the one whose end is farther away is the better exposed
    return max(inside, key=lambda i: min(wave - spectrum.segments[i].wave[0],
                                         spectrum.segments[i].wave[-1] - wave))


def local_trace(segment, nodes, wave: float, least: float = 0.0) -> Trace:
    """The samples around a pick as a Trace, ``least`` Angstrom to either side or more."""
    reach = max(AROUND * float(nodes.width_at(wave)), 1.2 * least)
    a, b = np.searchsorted(segment.wave, [wave - reach, wave + reach])
    part = slice(max(0, a), b)
    good = usable(Segment(
        segment.wave[part], segment.flux[part],
        None if segment.uncertainty is None else segment.uncertainty[part], segment.mask[part],
    ))
    if good.sum() < 8:
        raise InputRefused(
            f"{wave:.3f} A (vacuum)", "has no usable samples around it",
            "point at a place that is neither masked nor a gap",
        )
    w = segment.wave[part]
    flux = np.interp(np.arange(len(w)), np.flatnonzero(good), segment.flux[part][good])
    y = 1.0 - flux / nodes.continuum_at(w)
    noise, width = nodes.noise_at(w), nodes.width_at(w)
    pixels = width / np.gradient(w)
    length = nodes.correlation_length
    under = veil(y, noise, pixels, length) - veil(-y, noise, pixels, length)
    return Trace(w, y, noise, good, width, nodes.continuum_err_at(w), nodes.correlation, under)


def _snap(trace, wave: float, sign: int | None, smooth: int) -> tuple[int, int]:
    """(sample index, sign) of the extremum nearest to ``wave``; the sample itself if none."""
    y = running_mean(trace.y - trace.veil, smooth + 1 - smooth % 2)
    inner = y[1:-1]
    top = (inner > y[:-2]) & (inner >= y[2:])
    low = (inner < y[:-2]) & (inner <= y[2:])
    options = []
    for s, mark in ((1, top), (-1, low)):
        at = np.flatnonzero(mark) + 1
        at = at[trace.good[at] & (s * y[at] > 0)]
        if sign in (None, s) and len(at):
            best = at[np.argmin(np.abs(trace.wave[at] - wave))]
            options.append((abs(trace.wave[best] - wave), int(best), s))
    here = int(np.argmin(np.abs(trace.wave - wave)))
    if not options or min(options)[0] > SNAP * trace.width[here]:
        return here, sign or (1 if y[here] >= 0 else -1)
    return min(options)[1:]


def _others(features, segment: int, trace, centre: float) -> np.ndarray:
    """Known features of the segment about a pick, without the one picked: (m, 3)."""
    near = (features.segment == segment) & (features.wave > trace.wave[0])
    near &= (features.wave < trace.wave[-1]) & np.isfinite(features.fwhm)
    width = np.interp(features.wave, trace.wave, trace.width)
    near &= np.abs(features.wave - centre) > 0.5 * width
    depth = features.depth[near]
    base = 1.0 - np.interp(features.wave[near], trace.wave, trace.veil)
    return np.c_[depth * base, features.wave[near],
                 np.log(features.fwhm[near] / FWHM_PER_SIGMA)]
