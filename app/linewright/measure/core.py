"""Measure a spectrum: noise, pseudo-continuum, line width, features and their profiles."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..errors import InputRefused
from ..progress import Progress
from .continuum import Spacing, fit_continuum, smooth_run
from .detect import run_filters
from .features import FeatureTable
from .finding import filter_runs, segment_features
from .groups import Trace
from .matched import expected_false, threshold_for
from .noise import estimate_noise
from .options import Measurement, MeasureOptions, SegmentMeasure
from .veil import veil
from .stretches import stretches, usable
from .width import measure_width


@dataclass(frozen=True, eq=False)
class Prepared:
    """A segment with all that detection needs."""

    trace: Trace
    runs: list
    nodes: SegmentMeasure
    fwhm_pixels: np.ndarray


def measure_spectrum(spectrum, options: MeasureOptions = MeasureOptions(), progress=None):
    """Measure every significant peak and trough: a Measurement.

    spectrum: linewright Spectrum; options: MeasureOptions; progress: Progress or None.
    Raises InputRefused when no segment holds enough usable samples, Cancelled on cancel.
    """
    progress = progress or Progress()
    warnings: list[str] = []
    prepared = []
    for i, segment in enumerate(spectrum.segments):
        progress.report("measuring noise and continuum", 0.5 * i / len(spectrum.segments))
        prepared.append(prepare(segment, options, warnings))
    if all(p is None for p in prepared):
        raise InputRefused(
            spectrum.name or "spectrum", "no stretch of 30 usable samples in it",
            "check the mask, the flux column and the ranges asked for",
        )
    filtered = [filter_runs(p) if p is not None else [] for p in prepared]
    pieces = [piece for runs in filtered for f in runs for piece in f.pieces]
    threshold = options.threshold or threshold_for(pieces)
    tables = []
    for i, (ready, runs) in enumerate(zip(prepared, filtered)):
        progress.report("finding and fitting features", 0.6 + 0.4 * i / len(prepared))
        if ready is not None:
            tables.append(segment_features(ready, runs, threshold, i))
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


def filtered_runs_of(spectrum, options: MeasureOptions):
    """(samples, neighbour correlation) of every stretch, as ``expected_false`` takes them."""
    prepared = [prepare(s, options, []) for s in spectrum.segments]
    return [piece for p in prepared if p for f in filter_runs(p) for piece in f.pieces]


def _chosen(segment, ranges):
    good = usable(segment)
    if ranges:
        inside = np.zeros(len(good), dtype=bool)
        for low, high in ranges:
            inside |= (segment.wave >= low) & (segment.wave <= high)
        good &= inside
    return good


def prepare(segment, options: MeasureOptions, warnings: list) -> Prepared | None:
    """Noise, continuum and width of one segment; None when it holds too little."""
    good = _chosen(segment, options.ranges)
    runs = [r for r in stretches(segment.wave, good) if good[r].sum() >= 30]
    if not runs:
        return None
    keep = np.zeros(len(good), dtype=bool)
    for r in runs:
        keep[r] = good[r]
    good = keep
    wave = segment.wave
    flux = np.interp(np.arange(len(wave)), np.flatnonzero(good), segment.flux[good])
    noise = estimate_noise(flux, good, runs)
    width = _assumed_width(wave, noise.lag, options)
    for round_ in range(2):
        sigma = _sigma(segment, good, noise, warnings if round_ == 1 else [])
        spacing = Spacing(_node_distance(wave, good, width), _length(noise))
        centre, level, error = fit_continuum(wave, flux, good, sigma, spacing)
        run = smooth_run(wave, centre, level)
        y, relative = 1.0 - flux / run, sigma / run
        if not options.resolution:
            width = _width(wave, y, relative, good, runs, noise)
        pixels = width / np.gradient(wave)
        if round_ < 1:
            quiet = _quiet(y, relative, good, runs, pixels, noise)
            sure = bool(quiet[good].mean() > 0.6)
            longest = max(1.0, float(np.median(pixels[good])) * (0.85 if sure else 0.33))
            noise = estimate_noise(y, good, runs, quiet, longest, sure)
            noise = replace(noise, sigma=noise.sigma * run)
    under = _veil(y, relative, runs, pixels, _length(noise))
    trace = Trace(wave, y, relative, good, width, np.interp(wave, centre, error),
                  noise.correlation, under)
    nodes = _nodes(trace, centre, level, error, pixels)
    return Prepared(trace, runs, nodes, pixels)


def _veil(y, noise, runs, pixels, length):
    under = np.zeros(len(y))
    for r in runs:
        under[r] = veil(y[r], noise[r], pixels[r], length)
        under[r] -= veil(-y[r], noise[r], pixels[r], length)
    return under


def _length(noise) -> float:
    return float(1.0 + 2.0 * noise.correlation[1:].sum())


def _nodes(trace, centre, level, error, pixels) -> SegmentMeasure:
    at = np.unique(np.linspace(0, len(trace.wave) - 1, 200).astype(int))
    count = 16 * max(len(centre) - 1, 1) + 1
    dense = np.interp(np.linspace(0, len(centre) - 1, count), np.arange(len(centre)), centre)
    dense = np.unique(np.r_[trace.wave[0], dense, trace.wave[-1]])
    return SegmentMeasure(
        node_wave=dense, node_flux=smooth_run(dense, centre, level),
        node_err=np.interp(dense, centre, error),
        noise_wave=trace.wave[at], noise=trace.noise[at], correlation=trace.correlation,
        width_wave=trace.wave[at], width=trace.width[at], width_pixels=pixels[at],
    )


def _assumed_width(wave, lag, options):
    if options.resolution:
        return wave / options.resolution
    return np.gradient(wave) * max(3.0, 3.0 * lag)


def _node_distance(wave, good, width):
    """150 line widths, at most a 25th of the range, but 15 widths, 60 samples
    and a 300th of the range at least."""
    typical = float(np.median(width[good]))
    step = float(np.median(np.gradient(wave)[good]))
    span = float(wave[good][-1] - wave[good][0])
    return max(
        min(150.0 * typical, span / 25.0), 15.0 * typical, min(60 * step, span / 12.0),
        span / 300.0,
    )


def _sigma(segment, good, noise, warnings):
    """Noise in flux units: the uncertainty array where it agrees with the pixels.

    The pixels may scatter less than the array says by a factor 0.7 (correlated samples
    do) and more by 1.25 before the array is rescaled.
    """
    if segment.uncertainty is None:
        return noise.sigma
    index = np.arange(len(good))
    given = np.interp(index, index[good], segment.uncertainty[good])
    scale = float(np.median(noise.sigma[good] / given[good]))
    if 0.7 < scale < 1.25:
        return given
    warnings.append(
        f"the uncertainty array is off by a factor {scale:.2f} against the scatter of the "
        "samples and was rescaled"
    )
    return given * scale


def _width(wave, y, noise, good, runs, model):
    """Line width in Angstrom at every sample; three independent samples without lines."""
    width = measure_width(wave, y, noise, good, runs, model.correlation)
    return 3.0 * model.lag * np.gradient(wave) if width is None else width


def _quiet(y, noise, good, runs, pixels, model):
    """True where neither filter sees a feature within 1.5 widths."""
    quiet = good.copy()
    for r in runs:
        f = run_filters(y[r], noise[r], good[r], pixels[r], model.correlation)
        busy = (np.abs(f.level) > 5.0) | (np.abs(f.curve) > 4.0)
        reach = int(1.5 * np.median(pixels[r])) + 1
        near = np.convolve(busy, np.ones(2 * reach + 1), mode="full")[reach : reach + len(busy)]
        quiet[r] &= near < 0.5
    return quiet


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
