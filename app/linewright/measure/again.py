"""The same features fitted again: under another continuum, or in another spectrum."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from .core import measure_spectrum
from .detect import run_filters
from .features import FeatureTable
from .finding import Found
from .gauss import FWHM_PER_SIGMA
from .groups import Trace, fit_features, group_features
from .options import MeasureOptions
from .stretches import stretches, usable
from .table import fitted_table
from .veil import veil

C_KM_S = 299792.458
MEASURED = ("wave", "depth", "fwhm", "ew")


@dataclass(frozen=True, eq=False)
class Differences:
    """Second measurement less the first, and one sigma of it, for each feature, (n,).

    features: the table in the second spectrum, same rows, NaN where it has no samples;
    wave: Angstrom after the shift; depth; fwhm: Angstrom; ew: milliangstrom.
    """

    features: FeatureTable
    wave: np.ndarray
    wave_err: np.ndarray
    depth: np.ndarray
    depth_err: np.ndarray
    fwhm: np.ndarray
    fwhm_err: np.ndarray
    ew: np.ndarray
    ew_err: np.ndarray


def measure_again(features: FeatureTable, spectrum, velocity: float = 0.0, options=None):
    """The same ledger on another spectrum of the star: (Differences, its Measurement).

    features: the first table; spectrum: the other one; velocity: of the second relative to
    the first, km/s; options: MeasureOptions. Nothing is searched: every feature is fitted
    where it is expected. Errors of the two are independent and added in quadrature.
    """
    measured = measure_spectrum(spectrum, options or MeasureOptions())
    factor = 1.0 + velocity / C_KM_S
    segment = _best_segment(measured, features.wave * factor)
    moved = replace(features, wave=features.wave * factor, fwhm=features.fwhm * factor,
                    segment=np.maximum(segment, 0))
    order = np.lexsort((moved.wave, moved.segment))
    known = [i for i, s in enumerate(measured.segments) if s is not None]
    table = remeasured(spectrum, measured, moved.take(order), known)
    table = table.take(np.argsort(order))
    table = _blank(table, segment < 0)
    return differences(features, table, factor), measured


def differences(first: FeatureTable, second: FeatureTable, factor: float) -> Differences:
    """Of two tables with the same rows; factor: of the second's wavelengths over the first's."""
    columns = {}
    for name in MEASURED:
        scale = factor if name in ("wave", "fwhm", "ew") else 1.0
        columns[name] = getattr(second, name) / scale - getattr(first, name)
        columns[f"{name}_err"] = np.hypot(
            getattr(second, f"{name}_err") / scale, getattr(first, f"{name}_err"))
    return Differences(second, **columns)


def remeasured(
    spectrum, measurement, features: FeatureTable, segments, veil_held=None
) -> FeatureTable:
    """``features`` (sorted by segment, then wavelength) fitted again in ``segments``.

    Continuum, noise and width are the measurement's. Numbers and hand marks stay. veil_held:
    the veil at every sample of the only segment, where it is not to be found anew: a
    continuum that a person raised is not to be taken for broad absorption.
    """
    out = features
    for i in segments:
        rows = np.flatnonzero((features.segment == i) & np.isfinite(features.depth)
                              & np.isfinite(features.fwhm) & (features.fwhm > 0))
        rows = rows[["spike" not in features.flags[r].split() for r in rows]]
        if len(rows):
            fresh = _fitted((spectrum.segments[i], measurement.segments[i], veil_held),
                            features.take(rows), i)
            out = _put(out, rows, fresh)
    return out


def trace_of(segment, nodes, veil_held=None) -> tuple[Trace, list]:
    """(Trace of a whole segment under given nodes, its stretches); the veil found in it, or
    the one given."""
    good = usable(segment)
    runs = [r for r in stretches(segment.wave, good) if good[r].sum() >= 8]
    index = np.arange(len(good))
    flux = np.interp(index, index[good], segment.flux[good])
    y = 1.0 - flux / nodes.continuum_at(segment.wave)
    noise, width = nodes.noise_at(segment.wave), nodes.width_at(segment.wave)
    pixels = width / np.gradient(segment.wave)
    under = np.zeros(len(y))
    for r in runs if veil_held is None else ():
        for sign in (1, -1):
            under[r] += sign * veil(sign * y[r], noise[r], pixels[r], nodes.correlation_length)
    under = under if veil_held is None else veil_held
    return Trace(segment.wave, y, noise, good, width, nodes.continuum_err_at(segment.wave),
                 nodes.correlation, under), runs


def _fitted(where, features: FeatureTable, number: int) -> FeatureTable:
    segment, nodes, veil_held = where
    trace, runs = trace_of(segment, nodes, veil_held)
    index = np.clip(np.searchsorted(trace.wave, features.wave), 0, len(trace.wave) - 1)
    inside = [next((r for r in runs if r.start <= i < r.stop), None) for i in index]
    there = np.array([r is not None for r in inside])
    if not there.any():
        return _blank(features, ~there)
    limits = np.array([[r.start, r.stop] for r in inside if r is not None])
    f, index = features.take(there), index[there]
    own = np.array(["integrated" in words.split() for words in f.flags])
    under = np.where(own, 0.0, np.interp(f.wave, trace.wave, trace.veil))
    start = np.c_[f.depth * (1.0 - under), f.wave, np.log(f.fwhm / FWHM_PER_SIGMA)]
    group = group_features(f.wave, np.maximum(f.fwhm, trace.width[index]), limits[:, 0], own)
    fitted = fit_features(trace, start, limits, group, own)
    found = Found(index, f.sign, _strength(trace, runs, index, f.sign), limits, own,
                  np.zeros(len(index), dtype=bool), start)
    table = fitted_table(trace, nodes, found, fitted, number)
    return _put(_blank(features, ~there), np.flatnonzero(there), table)


def _strength(trace, runs, index, sign):
    level = np.zeros(len(trace.wave))
    pixels = trace.width / np.gradient(trace.wave)
    for r in runs:
        level[r] = run_filters(trace.y[r], trace.noise[r], trace.good[r], pixels[r],
                               trace.correlation, trace.level_err[r]).level
    return sign * level[index]


def _put(table: FeatureTable, rows, fresh: FeatureTable) -> FeatureTable:
    """``table`` with the measurements of ``fresh`` in ``rows``; numbers and order stay."""
    columns, flags = {}, list(table.flags)
    for name in FeatureTable.__dataclass_fields__:
        if name not in ("flags", "number", "sign", "segment"):
            columns[name] = getattr(table, name).copy()
            columns[name][rows] = getattr(fresh, name)
    for row, words in zip(rows, fresh.flags, strict=True):
        hand = " hand" if "hand" in flags[row].split() and "hand" not in words.split() else ""
        flags[row] = f"{words}{hand}".strip()
    return replace(table, **columns, flags=tuple(flags))


def _blank(table: FeatureTable, rows) -> FeatureTable:
    """NaN for what could not be measured in ``rows``."""
    columns = {}
    for name in ("significance", "continuum", *MEASURED, *(f"{n}_err" for n in MEASURED)):
        if name != "wave":
            columns[name] = np.where(rows, np.nan, getattr(table, name))
    return replace(table, **columns)


def _best_segment(measured, wave):
    """Segment that covers each wavelength farthest from its ends; -1 where none does."""
    best, room = np.full(len(wave), -1), np.zeros(len(wave))
    for i, s in enumerate(measured.segments):
        if s is not None:
            here = np.minimum(wave - s.node_wave[0], s.node_wave[-1] - wave)
            best, room = np.where(here > room, i, best), np.maximum(room, here)
    covered = np.zeros(len(wave), dtype=bool)
    for low, high in measured.coverage:
        covered |= (wave >= low) & (wave <= high)
    return np.where(covered, best, -1)
