"""Measure a spectrum: noise, pseudo-continuum, line width, features and their profiles."""

from __future__ import annotations

from dataclasses import replace
from itertools import count

import numpy as np

from ..errors import InputRefused
from ..progress import Progress
from .features import FeatureTable
from .finding import filter_runs, segment_features
from .matched import expected_false, threshold_for
from .options import Measurement, MeasureOptions
from .prepare import prepare
from .table import spike_table

USUAL = 30  # reports after which half of a part is called done


def measure_spectrum(spectrum, options: MeasureOptions = MeasureOptions(), progress=None):
    """Measure every significant peak and trough: a Measurement.

    spectrum: linewright Spectrum; options: MeasureOptions; progress: Progress or None.
    Raises InputRefused when no segment holds enough usable samples, Cancelled on cancel.
    """
    progress = progress or Progress()
    warnings: list[str] = []
    prepared = []
    for i, segment in enumerate(spectrum.segments):
        tick = _ticker(progress, "measuring noise and continuum", 0.5, i, len(spectrum.segments))
        prepared.append(prepare(segment, options, warnings, tick))
    if all(p is None for p in prepared):
        raise InputRefused(
            spectrum.path or spectrum.name or "spectrum", "no stretch of 30 usable samples in it",
            "check the mask, the flux column and the ranges asked for",
        )
    filtered = [filter_runs(p) if p is not None else [] for p in prepared]
    pieces = [piece for runs in filtered for f in runs for piece in f.pieces]
    threshold = options.threshold or threshold_for(pieces)
    tables = []
    for i, (ready, runs) in enumerate(zip(prepared, filtered)):
        tick = _ticker(progress, "finding and fitting features", 0.4, i, len(prepared), 0.6)
        if ready is not None:
            ready = replace(ready, tick=tick)
            table, prepared[i] = segment_features(ready, runs, threshold, i, tick)
            tables.append(table)
            tables.append(spike_table(ready.trace, ready.nodes, ready.spikes, i))
    progress.report("measured", 1.0)
    return Measurement(
        features=_join(tables),
        segments=tuple(p.nodes if p is not None else None for p in prepared),
        threshold=float(threshold),
        trials=float(sum(2 * n for n, _ in pieces)),
        expected_false=expected_false(threshold, pieces),
        coverage=_coverage(prepared),
        warnings=tuple(dict.fromkeys(warnings)),
    )


def _ticker(progress, stage: str, share: float, i: int, of: int, begin: float = 0.0):
    """Reports within the i-th of ``of`` equal parts, ever smaller steps towards its end."""
    steps = count(1)

    def tick():
        n = next(steps)
        done = i + n / (n + USUAL)
        progress.report(stage, begin + share * done / of)

    progress.report(stage, begin + share * i / of)
    return tick


def filtered_runs_of(spectrum, options: MeasureOptions):
    """(samples, neighbour correlation) of every stretch, as ``expected_false`` takes them."""
    prepared = [prepare(s, options, []) for s in spectrum.segments]
    return [piece for p in prepared if p for f in filter_runs(p) for piece in f.pieces]


def _join(tables) -> FeatureTable:
    names = [n for n in FeatureTable.__dataclass_fields__ if n != "flags"]
    columns = {n: np.concatenate([getattr(t, n) for t in tables]) for n in names}
    flags = tuple(f for t in tables for f in t.flags)
    table = FeatureTable(**columns, flags=flags)
    table = table.take(np.lexsort((table.wave, table.segment)))
    return replace(table, number=np.arange(1, len(table) + 1))


def _coverage(prepared):
    ranges = sorted(
        (float(p.trace.wave[r.start]), float(p.trace.wave[r.stop - 1]))
        for p in prepared if p is not None for r in p.runs
    )
    merged: list[tuple[float, float]] = []
    for low, high in ranges:
        if merged and low <= merged[-1][1]:
            merged[-1] = (merged[-1][0], max(high, merged[-1][1]))
        else:
            merged.append((low, high))
    return tuple(merged)
