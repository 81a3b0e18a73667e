"""Noise, continuum, line width and spikes of one segment, ready for detection."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from .continuum import Spacing, smooth_run
from .detect import run_filters
from .floor import Floor, blur_of, blurred, largest_blur, noise_floor, unblurred
from .given import scale_of
from .groups import Trace
from .methods import method_of
from .noise import Noise, estimate_noise, short_scatter
from .options import MeasureOptions, SegmentMeasure
from .spikes import (
    UNSURE, Spikes, bridged, few, find_spikes, in_absorption, joined, none_found, upward,
)
from .stretches import stretches, usable
from .veil import veil
from .width import measure_width, sampled
from .width_law import WidthLaw

FAR = 2.5
AGREE = (0.9, 1.15)  # noise over its floor that sure noise may have


def _chosen(segment, ranges):
    good = usable(segment)
    if ranges:
        inside = np.zeros(len(good), dtype=bool)
        for low, high in ranges:
            inside |= (segment.wave >= low) & (segment.wave <= high)
        good &= inside
    return good


@dataclass(frozen=True, eq=False)
class Raw:
    """Samples of a segment with holes bridged, (n,); runs: stretches of 30 samples or more;
    given: the uncertainty array or None; floor: noise at the highest frequencies; blur:
    sigma in samples of the largest smoothing of the noise that is possible, None: unknown;
    tick: called between steps."""

    wave: np.ndarray
    flux: np.ndarray
    good: np.ndarray
    runs: list
    given: np.ndarray | None
    floor: Floor | None
    blur: float | None
    tick: Callable[[], None]


@dataclass(frozen=True, eq=False)
class Level:
    """Continuum nodes (centre, level, relative error), the run of it, y and its noise, the
    line width in Angstrom; law: how that was seen to run, None where it was not measured;
    asked: the spacing of nodes, noise (flux units), its correlation and lag it answers to."""

    centre: np.ndarray
    level: np.ndarray
    error: np.ndarray
    run: np.ndarray
    y: np.ndarray
    noise: np.ndarray
    width: np.ndarray
    law: WidthLaw | None
    asked: tuple


@dataclass(frozen=True, eq=False)
class Prepared:
    """A segment with all that detection needs."""

    trace: Trace
    runs: list
    nodes: SegmentMeasure
    fwhm_pixels: np.ndarray
    spikes: Spikes
    level: Level
    moves: bool  # whether the continuum may be set again after the fits
    tick: Callable[[], None] = lambda: None


def prepare(segment, options: MeasureOptions, warnings: list, tick=lambda: None):
    """Noise, continuum and width of one segment: Prepared, None when it holds too little.

    tick: called between steps, so that a window can go on and a cancel is heeded.
    """
    raw = _raw(segment, options, tick)
    if raw is None:
        return None
    tick()
    step = np.gradient(raw.wave)
    noise = bounded(estimate_noise(raw.flux, raw.good, raw.runs), raw)
    tick()
    width = _assumed_width(raw.wave, noise.lag, options)
    first = _level(raw, believed(raw, noise, width / step, False)[0], width, noise, options)
    tick()
    noise, sure = _second_noise(raw, first, noise)
    tick()
    if far_fetched(noise, raw):
        noise = sensible(noise, raw)
        width = _assumed_width(raw.wave, noise.lag, options)
        first = _level(raw, believed(raw, noise, width / step, False)[0], width, noise, options)
        noise, sure = _second_noise(raw, first, noise)
        noise = sensible(noise, raw) if far_fetched(noise, raw) else noise
        tick()
    sigma, note = believed(raw, noise, first.width / step, sure)
    warnings += note + doubts(raw, sure)
    if raw.given is not None and noise.lag == 1 and not sure:
        noise = _smoothed(noise, raw, sigma)
    last = _level(raw, sigma, first.width, noise, options, first)
    tick()
    spikes = _spikes(raw, last, noise, options)
    tick()
    pixels = last.width / step
    trace = Trace(raw.wave, last.y, last.noise, raw.good & ~spikes.hit, last.width,
                  np.interp(raw.wave, last.centre, last.error), noise.correlation,
                  _veil(last.y, last.noise, raw.runs, pixels, _length(noise)))
    return Prepared(trace, raw.runs, nodes_of(trace, last), pixels, spikes, last,
                    options.continuum == "levels")


def _within(segment, ranges):
    """The segment from the first to the last of the samples asked for: what lies beyond, of
    another sampling perhaps, must not set blocks and widths here."""
    if not ranges:
        return segment
    low, high = min(r[0] for r in ranges), max(r[1] for r in ranges)
    first, last = np.searchsorted(segment.wave, [low, high])
    error = segment.uncertainty
    kept = slice(first, last)
    return replace(
        segment, wave=segment.wave[kept], flux=segment.flux[kept], mask=segment.mask[kept],
        uncertainty=None if error is None else error[kept],
    )


def _raw(segment, options, tick) -> Raw | None:
    segment = _within(segment, options.ranges)
    if len(segment.wave) < 30:
        return None
    good = _chosen(segment, options.ranges)
    runs = [r for r in stretches(segment.wave, good) if good[r].sum() >= 30]
    if not runs:
        return None
    keep = np.zeros(len(good), dtype=bool)
    for r in runs:
        keep[r] = good[r]
    flux = bridged(np.asarray(segment.flux, dtype=float), ~keep)
    given = segment.uncertainty
    given = None if given is None else bridged(np.asarray(given, dtype=float), ~keep)
    floor = noise_floor(flux, keep, runs)
    return Raw(segment.wave, flux, keep, runs, given, floor, largest_blur(floor, flux[keep]), tick)


def _level(raw, sigma, width, noise, options, before=None) -> Level:
    """Continuum under the noise ``sigma`` (flux units), and the line width above it.

    width: Angstrom, (n,), from which the distance of nodes follows; before: a Level, which is
    the answer where the same was asked.
    """
    spacing = Spacing(_node_distance(raw.wave, raw.good, width), _length(noise), raw.tick)
    asked = spacing, sigma, noise.correlation, noise.lag
    if before is not None and _same(before.asked, asked):
        return before
    fit = method_of(options.continuum)
    centre, level, error = fit(raw.wave, raw.flux, raw.good, sigma, spacing)
    run = smooth_run(raw.wave, centre, level)
    y, relative = 1.0 - raw.flux / run, sigma / run
    law = measure_width(raw.wave, y, relative, raw.good, raw.runs, noise.correlation)
    width = _width(raw.wave, law, noise.lag, options)
    return Level(centre, level, error, run, y, relative, width, law, asked)


def _same(one, other) -> bool:
    return one[0] == other[0] and all(map(np.array_equal, one[1:], other[1:]))


def _second_noise(raw, first: Level, noise) -> tuple[Noise, bool]:
    """(noise of the samples between the features, whether most samples lie there)."""
    pixels = first.width / np.gradient(raw.wave)
    quiet = _quiet(first.y, first.noise, raw.good, raw.runs, pixels, noise)
    raw.tick()
    sure = bool(quiet[raw.good].mean() > 0.6)
    longest = max(1.0, float(np.median(pixels[raw.good])) * (0.85 if sure else 0.33))
    noise = estimate_noise(first.y, raw.good, raw.runs, quiet, longest, sure)
    return bounded(replace(noise, sigma=noise.sigma * first.run), raw, sure), sure


def doubts(raw: Raw, sure: bool) -> list[str]:
    """Words where neither an array nor samples free of lines nor the highest frequencies
    tell the noise."""
    if raw.given is not None or sure or raw.floor is not None and raw.floor.flat:
        return []
    return ["no uncertainty array and few samples free of lines: the noise is an estimate, "
            "all errors and significances with it"]


def far_fetched(noise: Noise, raw: Raw) -> bool:
    """Whether the noise seems correlated over FAR times what its fall towards the highest
    frequencies allows: dense lines may have been taken for noise."""
    return raw.blur is not None and noise.lag > FAR * max(3.0, 3.5 * raw.blur)


def sensible(noise: Noise, raw: Raw) -> Noise:
    """The noise that the highest frequencies tell of, no more than the shortest differences
    of the samples allow."""
    r = blurred(raw.blur)
    near = short_scatter(raw.flux, raw.good, raw.runs, np.r_[r, np.zeros(3)])
    sigma = np.minimum(unblurred(raw.floor, raw.blur), near)
    lag = max(1, len(r) // 2)
    return Noise(sigma, r[: lag + 1], lag, True)


def bounded(noise: Noise, raw: Raw, sure: bool = False) -> Noise:
    """``noise``, or its floor at the highest frequencies where lines have raised it.

    White noise is no larger than at the highest frequencies. Where few samples are free
    of lines the floor is the better estimate; else only where the two disagree. Where lines
    may reach those frequencies the floor is a bound from above. sure: most samples are
    free of lines.
    """
    floor = raw.floor
    if floor is None:
        return noise
    if not floor.flat:
        crowded = not sure and not noise.like and (floor.white or floor.bound)
        crowded = crowded and not _in_emission(raw)
        least = np.minimum(noise.sigma, floor.sigma)
        return replace(noise, sigma=least) if crowded else noise
    ratio = float(np.median(noise.sigma[raw.good] / floor.sigma[raw.good]))
    if sure and AGREE[0] < ratio < AGREE[1]:
        return noise
    return Noise(floor.sigma, np.array([1.0]), 1, noise.like)


def _in_emission(raw: Raw) -> bool:
    """Whether the highest samples stand out far more than the lowest: bright lines, between
    which the samples speak for themselves."""
    low, middle, high = np.quantile(raw.flux[raw.good], [0.002, 0.5, 0.998])
    return bool(high - middle > 5.0 * (middle - low))


def believed(raw: Raw, noise: Noise, pixels, sure: bool) -> tuple[np.ndarray, list[str]]:
    """(noise in flux units, words): the uncertainty array unless the samples refute it."""
    if raw.given is None:
        return noise.sigma, []
    typical = float(np.median(pixels[raw.good]))
    scale, evidence = scale_of(raw.given, noise, raw.floor, typical, sure, raw.good)
    if scale == 1.0:
        return raw.given, []
    return raw.given * scale, [
        f"the uncertainty array is off by a factor {scale:.2f} against the {evidence} "
        "and was rescaled"
    ]


def _smoothed(noise: Noise, raw: Raw, sigma) -> Noise:
    """In crowds that hide it: the correlation that a known noise must have at its floor."""
    blur = 0.0 if raw.floor is None else blur_of(raw.floor, sigma)
    return noise if blur == 0.0 else replace(noise, correlation=blurred(blur))


def _spikes(raw, last: Level, noise, options) -> Spikes:
    """Hits narrower than the instrument, or than three samples where it is not known; in a
    spectrum of absorption lines also peaks narrower than those."""
    step = np.gradient(raw.wave)
    measured = float(np.quantile((last.width / step)[raw.good], 0.05))
    limit = UNSURE
    if options.resolution:
        limit = float(np.median((raw.wave / step)[raw.good])) / options.resolution
    seen = (last.noise, raw.good, raw.runs)
    peaks = none_found(len(last.y))
    absorbed = in_absorption(last.y, last.noise, raw.good)
    if noise.lag > 2 or not absorbed and not options.resolution:
        return peaks  # samples smeared by resampling; narrow peaks that may be lines
    if absorbed:
        peaks = find_spikes(last.y, *seen, measured, noise.correlation)
        peaks = few(upward(peaks, last.y, last.noise))
    rest = bridged(last.y, peaks.hit)
    narrow = few(find_spikes(rest, *seen, min(measured, limit), noise.correlation))
    return joined(peaks, narrow)


def _veil(y, noise, runs, pixels, length):
    under = np.zeros(len(y))
    for r in runs:
        under[r] = veil(y[r], noise[r], pixels[r], length)
        under[r] -= veil(-y[r], noise[r], pixels[r], length)
    return under


def _length(noise) -> float:
    return float(1.0 + 2.0 * noise.correlation[1:].sum())


def nodes_of(trace, last: Level) -> SegmentMeasure:
    """Continuum, noise and width of a segment as nodes for linear interpolation."""
    at = np.unique(np.linspace(0, len(trace.wave) - 1, 200).astype(int))
    centre, pixels = last.centre, trace.width / np.gradient(trace.wave)
    count = 16 * max(len(centre) - 1, 1) + 1
    dense = np.interp(np.linspace(0, len(centre) - 1, count), np.arange(len(centre)), centre)
    dense = np.unique(np.r_[trace.wave[0], dense, trace.wave[-1]])
    return SegmentMeasure(
        node_wave=dense, node_flux=smooth_run(dense, centre, last.level),
        node_err=np.interp(dense, centre, last.error),
        noise_wave=trace.wave[at], noise=trace.noise[at], correlation=trace.correlation,
        width_wave=trace.wave[at], width=trace.width[at], width_pixels=pixels[at],
        width_law="" if last.law is None else last.law.kind,
        width_err=float("nan") if last.law is None else last.law.error,
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


def _width(wave, law, lag, options):
    """Line width in Angstrom at every sample, no less than the instrument's; three
    independent samples where there are neither lines nor a known instrument."""
    if options.resolution:
        instrument = wave / options.resolution
        return instrument if law is None else np.maximum(instrument, sampled(law, wave))
    return 3.0 * lag * np.gradient(wave) if law is None else sampled(law, wave)


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
