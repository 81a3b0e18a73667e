"""Features of one segment: found, fitted, and looked for again in what the fit left."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from .complexes import with_compounds
from .detect import find_extrema, run_filters
from .gauss import FWHM_PER_SIGMA
from .groups import BROAD, Fitted, backgrounds, fit_features, group_features
from .guess import first_guess
from .narrow import SHARE as NARROW
from .narrow import narrow_extrema
from .relevel import relevelled
from .strong import with_strong_lines
from .table import WING, fitted_table
from .unlined import without_lines
from .veil import owners, running_min

MISFIT = 0.12  # residuals below this share of a neighbour's depth may be its own misfit
RELEVEL = 3  # times at most that the continuum is set again
BESIDE = 1.5  # line widths within which features are members of one blend
THIN = 0.6  # line widths: narrower than the star's own lines can be
SLIVER, CONTRAST = 0.3, 8.0  # a thin line: of the deepest member's depth; errors of depth
EQUAL = 0.5  # a member of a close pair: of the deepest member's depth
SHARP = 1.3e-4  # of the wavelength (40 km/s): broader lines are blends of unknown number
LEAST_DEPTH = 3.0  # sigmas of depth below which a feature found in residuals is dropped


@dataclass(frozen=True, eq=False)
class Found:
    """Features before and after their fit: sample index, sign, significance, first and
    last+1 sample of the stretch, source of a veil or not, found in residuals or not,
    start parameters; m rows."""

    index: np.ndarray
    sign: np.ndarray
    significance: np.ndarray
    limits: np.ndarray
    own: np.ndarray
    late: np.ndarray
    start: np.ndarray

    def take(self, which) -> Found:
        return Found(*(getattr(self, n)[which] for n in self.__dataclass_fields__))

    def joined(self, other: Found) -> Found:
        both = Found(*(
            np.concatenate([getattr(self, n), getattr(other, n)])
            for n in self.__dataclass_fields__
        ))
        return both.take(np.argsort(both.start[:, 1], kind="stable"))


def filter_runs(ready):
    """Filter outputs of each stretch of a prepared segment."""
    t = ready.trace
    return [
        run_filters(t.y[r], t.noise[r], t.good[r], ready.fwhm_pixels[r], t.correlation,
                    t.level_err[r])
        for r in ready.runs
    ]


def segment_features(ready, filtered, threshold: float, segment: int, tick=lambda: None):
    """(all features of one segment as a table, the segment under its final continuum)."""
    clear = without_lines(ready, filtered) if ready.moves else None
    if clear is not None:
        ready, filtered = clear, filter_runs(clear)
        tick()
    found = _first(ready, filtered, threshold)
    tick()
    fitted = _fit(ready, found)
    worthy = _worthy(ready.trace, found, fitted)
    if not worthy.all():
        found = found.take(worthy)
        fitted = _fit(ready, found)
    for _ in range(RELEVEL if ready.moves else 0):
        tick()
        better = relevelled(ready, found, fitted)
        if better is None:
            break
        ready = better
        found = replace(found, start=_signed(fitted.params, found.sign))
        fitted = _fit(ready, found)
    tick()
    more = _second(ready, filtered, threshold, found, fitted)
    tick()
    if len(more.index):
        found = replace(found, start=_signed(fitted.params, found.sign)).joined(more)
        fitted = _fit(ready, found)
    keep = _trusted(ready.trace, found, fitted)
    table = fitted_table(ready.trace, ready.nodes, found.take(keep), fitted.take(keep), segment)
    return with_compounds(with_strong_lines(table, ready, tick), ready, tick), ready


def _collect(ready, outputs, threshold):
    index, sign, significance, limits = [], [], [], []
    for r, f in zip(ready.runs, outputs, strict=True):
        i, s, strength = find_extrema(f, ready.trace.good[r], threshold)
        index.append(i + r.start)
        sign.append(s)
        significance.append(strength)
        limits.append(np.tile([r.start, r.stop], (len(i), 1)))
    return (np.concatenate(index), np.concatenate(sign), np.concatenate(significance),
            np.concatenate(limits).reshape(-1, 2))


def _first(ready, filtered, threshold) -> Found:
    t = ready.trace
    index, sign, significance, limits = _collect(ready, filtered, threshold)
    own = np.zeros(len(index), dtype=bool)
    for s in (1, -1):
        which = sign == s
        own[which] = owners(index[which], s * t.y[index[which]], np.maximum(s * t.veil, 0.0))
    start = first_guess(t, index, sign, own, _smooth(ready))
    late = np.zeros(len(index), dtype=bool)
    found = Found(index, sign, significance, limits, own, late, start)
    return found.joined(_narrow(ready, filtered, threshold, found))


def _narrow(ready, filtered, threshold, found) -> Found:
    """Features that only the narrower filter tells apart."""
    t, parts = ready.trace, []
    for r, f in zip(ready.runs, filtered, strict=True):
        inside = (found.index >= r.start) & (found.index < r.stop)
        taken = found.index[inside] - r.start, found.sign[inside]
        table = narrow_extrema(t, r, f, threshold, taken)
        limits = np.tile([r.start, r.stop], (len(table), 1))
        parts.append(np.c_[table[:, 0] + r.start, table[:, 1:], limits])
    table = np.concatenate(parts)
    index, sign = table[:, 0].astype(int), table[:, 1].astype(int)
    none = np.zeros(len(index), dtype=bool)
    width = NARROW * t.width[index]
    veil = sign * np.maximum(sign * t.veil[index], 0.0)
    start = np.c_[0.5 * (t.y[index] - veil), t.wave[index], np.log(width / FWHM_PER_SIGMA)]
    return Found(index, sign, table[:, 2], table[:, 3:].astype(int), none, ~none, start)


def _smooth(ready) -> int:
    return max(1, int(np.round(0.3 * np.median(ready.fwhm_pixels))))


def _fit(ready, found: Found) -> Fitted:
    fwhm = FWHM_PER_SIGMA * np.exp(found.start[:, 2])
    t = ready.trace
    at = np.clip(np.searchsorted(t.wave, found.start[:, 1]), 0, len(t.wave) - 1)
    alone = found.own & (fwhm > BROAD * t.width[at])
    fwhm = np.maximum(fwhm, t.width[at])
    group = group_features(found.start[:, 1], fwhm, found.limits[:, 0], alone)
    return fit_features(t, found.start, found.limits, group, found.own, ready.tick)


def _second(ready, filtered, threshold, found, fitted) -> Found:
    """Features in the residuals that neither misfit nor the raw spectrum speaks against."""
    t = ready.trace
    _, model = backgrounds(t, fitted.params, found.own)
    residual = t.y - model
    outputs = [
        run_filters(residual[r], t.noise[r], t.good[r], ready.fwhm_pixels[r], t.correlation,
                    t.level_err[r])
        for r in ready.runs
    ]
    index, sign, significance, limits = _collect(ready, outputs, threshold)
    height = np.empty(len(t.y))
    raw = np.empty(len(t.y))
    nearby = np.empty(len(t.y))
    for r, f, before in zip(ready.runs, outputs, filtered, strict=True):
        height[r], raw[r] = f.tame, before.level
        reach = 2 * int(1.2 * np.median(f.fwhm)) + 1
        nearby[r] = -running_min(-np.abs(model[r]), reach)
    solid = (sign * height[index] > MISFIT * nearby[index]) & (sign * raw[index] >= threshold)
    solid &= _away(found, fitted, t.wave[index], sign, 0.5 * t.width[index])
    index, sign = index[solid], sign[solid]
    start = np.c_[height[index], t.wave[index], np.log(t.width[index] / FWHM_PER_SIGMA)]
    return Found(index, sign, significance[solid], limits[solid],
                 np.zeros(len(index), dtype=bool), np.ones(len(index), dtype=bool), start)


def _away(found, fitted, wave, sign, least) -> np.ndarray:
    """True where no feature of the same sign is nearer than ``least`` Angstrom."""
    out = np.ones(len(wave), dtype=bool)
    for s in (1, -1):
        there = np.sort(fitted.params[found.sign == s, 1])
        which = sign == s
        if not len(there) or not which.any():
            continue
        right = np.clip(np.searchsorted(there, wave[which]), 1, len(there) - 1)
        near = np.minimum(
            np.abs(there[np.minimum(right, len(there) - 1)] - wave[which]),
            np.abs(there[right - 1] - wave[which]),
        )
        out[which] = near >= least[which]
    return out


def _worthy(trace, found, fitted) -> np.ndarray:
    """False for finds of the narrow filter that are slivers of the blend they stand in.

    A rotating star's blends are no sums of Gaussians: what is left of them looks narrow,
    but is shallow beside the members of the blend; an interstellar line is not.
    """
    depth, place = np.abs(fitted.params[:, 0]), fitted.params[:, 1]
    width = np.interp(place, trace.wave, trace.width)
    deepest = np.zeros(len(depth))
    for step in (-3, -2, -1, 1, 2, 3):
        near = np.roll(place, step)
        beside = np.abs(near - place) < BESIDE * width
        beside &= np.roll(found.sign, step) == found.sign
        deepest = np.maximum(deepest, np.where(beside, np.roll(depth, step), 0.0))
    own_width = FWHM_PER_SIGMA * np.exp(fitted.params[:, 2]) / width
    contrast = np.where(width < SHARP * place, 1.0, 2.0)
    thin = own_width < THIN / contrast**0.5
    sure = (depth > contrast * CONTRAST * fitted.errors[:, 0]) & ~fitted.trouble
    pair = (own_width >= THIN) & (depth > EQUAL * deepest) & (width < SHARP * place)
    line = thin & sure & (depth > contrast * SLIVER * deepest) | pair
    return ~found.late | line


def _trusted(trace, found, fitted) -> np.ndarray:
    """All but the residual finds whose fitted depth is within its error, and the fits that
    failed and left nothing beyond the broad wing they stand on."""
    weak = np.abs(fitted.params[:, 0]) < LEAST_DEPTH * fitted.errors[:, 0]
    wing = np.abs(np.interp(fitted.params[:, 1], trace.wave, trace.veil)) > WING
    empty = ~found.own & wing & weak & fitted.trouble
    return np.flatnonzero(~(empty | found.late & (weak | fitted.trouble)))


def _signed(params, sign) -> np.ndarray:
    """Parameters to start from, none of height zero, which would lose the sign."""
    out = params.copy()
    out[:, 0] = sign * np.maximum(np.abs(params[:, 0]), 1e-9)
    return out
