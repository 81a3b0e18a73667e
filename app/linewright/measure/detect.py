"""Peaks and troughs of a stretch of samples that stand out from the noise.

Two filters run side by side. The Gaussian matched filter against the pseudo-continuum
gives the significance and finds lone lines at the ideal signal-to-noise. The curvature
filter (minus second derivative of the same Gaussian) sees neither level nor slope and
separates the members of a blend. A feature must pass the threshold in the first and be a
distinct extremum of either: between two features of one filter the signal must drop by
the threshold itself, or the lower one is a wiggle of noise on the other.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .continuum import in_emission
from .matched import curvature_kernel, filtered_correlation, gaussian_kernel, noise_gain
from .veil import running_mean

FAKED = 4.0  # errors of the continuum, in its noise, beyond which it tells nothing of a feature
PLAIN = 5.0  # sigmas: a trough seen against the continuum as well needs no other witness
BENT = 0.45  # share of such an error that may bend like a line


@dataclass(frozen=True, eq=False)
class Filtered:
    """Signal-to-noise of the two filters at each sample of a stretch, shape (n,).

    level: Gaussian against the continuum; curve: curvature; tame: y smoothed over 0.4 widths; fwhm: samples, shape (n,);
    pieces: (samples, correlation of neighbours) for the count of independent trials.
    """

    level: np.ndarray
    curve: np.ndarray
    tame: np.ndarray
    fwhm: np.ndarray
    pieces: tuple[tuple[float, float], ...]


def same(values: np.ndarray, kernel: np.ndarray) -> np.ndarray:
    """Convolution of the length of ``values``, whatever the length of the kernel."""
    half = len(kernel) // 2
    return np.convolve(values, kernel, mode="full")[half : half + len(values)]


def _spans(fwhm: np.ndarray, longest: int = 16384) -> list[slice]:
    """Slices over which the width changes by less than 3 %."""
    log = np.floor(np.log(fwhm) / 0.03)
    breaks = np.flatnonzero(np.diff(log)) + 1
    edges = np.unique(np.r_[0, breaks, np.arange(0, len(fwhm), longest), len(fwhm)])
    return [slice(int(a), int(b)) for a, b in zip(edges[:-1], edges[1:])]


def run_filters(y, noise, good, fwhm, correlation, level_err=None) -> Filtered:
    """Both filters over one stretch.

    y: (continuum - flux)/continuum, shape (n,), finite; noise: one sigma of y, (n,);
    good: usable samples; fwhm: line width in samples, (n,); correlation: of the noise;
    level_err: one sigma of the continuum relative to it (lowers the significance of what
    a continuum error could fake).
    """
    weight = np.where(good, 1.0 / noise, 0.0)
    held = _filled(y, good)
    bright = in_emission(1.0 - held)
    level, curve, tame = np.empty(len(y)), np.empty(len(y)), np.empty(len(y))
    pieces = []
    for span in _spans(fwhm):
        width = float(np.median(fwhm[span]))
        gauss, bend = gaussian_kernel(width), curvature_kernel(width)
        pad = len(bend) // 2 + 1
        wide = slice(max(0, span.start - pad), span.stop + pad)
        inner = slice(span.start - wide.start, span.stop - wide.start)
        gain = noise_gain(gauss, correlation)
        s = _matched(y[wide], weight[wide], gauss, gain)
        if level_err is not None:
            fake = _matched(level_err[wide], weight[wide], gauss, gain)
            s = s / np.sqrt(1.0 + fake**2)
        h = same(held[wide], bend) / (noise[wide] * noise_gain(bend, correlation))
        if level_err is not None and not bright:
            s = _told_by_curvature(s, h, fake)
        level[span], curve[span] = s[inner], h[inner]
        tame[span] = running_mean(held[wide], 2 * int(0.2 * width) + 1)[inner]
        rho = filtered_correlation(gauss, correlation, 1) / gain**2
        pieces.append((float(good[span].sum()), float(min(rho, 1 - 1e-9))))
    return Filtered(level, curve, tame, fwhm, tuple(pieces))


def _matched(y, weight, kernel, gain):
    top = same(y * weight**2, kernel)
    bottom = same(weight**2, kernel**2)
    white = np.sqrt(np.sum(kernel**2))
    return top / np.sqrt(np.maximum(bottom, 1e-300)) * (white / gain)


def _told_by_curvature(level, curve, fake):
    """``level``, or the curvature of a trough where the continuum's error outweighs the noise:
    it sees no continuum, and an error of that does not bend as sharply as a line.
    Troughs only, and none between bright lines: bumps are what a pseudo-continuum leaves
    between broad lines, troughs what it leaves between bright ones."""
    told = (fake > FAKED) & (level > 0) & (level < PLAIN) & (curve > np.maximum(PLAIN, BENT * fake))
    return np.where(told, curve, level)


def _filled(y, good):
    if good.all():
        return y
    index = np.arange(len(y))
    return np.interp(index, index[good], y[good])


def find_extrema(filtered: Filtered, good, threshold: float):
    """Features of one stretch: (sample index, sign, significance), each shape (m,), sorted."""
    found = []
    for sign in (1, -1):
        level, curve, tame = (sign * x for x in (filtered.level, filtered.curve, filtered.tame))
        lone = distinct(level, threshold, threshold)
        lone = lone[curve[lone] > 0]
        bends = distinct(curve, threshold, threshold)
        bends = _flat_cores(bends[level[bends] >= threshold], tame, filtered.fwhm)
        keep = np.unique(np.r_[bends, _apart(lone, bends, curve)])
        found.append(np.c_[keep, np.full(len(keep), sign), level[keep]])
    table = np.concatenate(found)
    index = table[:, 0].astype(int)
    table = table[supported(index, good, filtered.fwhm)]
    table = table[np.argsort(table[:, 0], kind="stable")]
    return table[:, 0].astype(int), table[:, 1].astype(int), table[:, 2]


def supported(index, good, fwhm):
    """True where the extremum and most samples within half a width are usable."""
    total = np.r_[0, np.cumsum(good)]
    half = np.maximum(1, np.round(0.5 * fwhm[index])).astype(int)
    low, high = np.maximum(index - half, 0), np.minimum(index + half + 1, len(good))
    share = (total[high] - total[low]) / (2 * half + 1)
    return good[index] & (share >= 0.7)


def distinct(signal, least: float, dip: float) -> np.ndarray:
    """Indices of maxima of at least ``least`` with drops of ``dip`` between neighbours."""
    padded = np.r_[-np.inf, signal, -np.inf]
    top = (padded[1:-1] > padded[:-2]) & (padded[1:-1] >= padded[2:]) & (signal >= least)
    peaks = np.flatnonzero(top)
    while len(peaks) > 1:
        valley = np.minimum.reduceat(signal, peaks)[:-1]
        drop = np.minimum(signal[peaks[:-1]], signal[peaks[1:]]) - valley
        shallow = drop < dip
        if not shallow.any():
            break
        around = np.r_[np.inf, drop, np.inf]
        first = shallow & (drop <= around[:-2]) & (drop < around[2:])
        if not first.any():
            first[np.argmin(drop)] = True
        pair = np.flatnonzero(first)
        lower = np.where(signal[peaks[pair]] < signal[peaks[pair + 1]], pair, pair + 1)
        peaks = np.delete(peaks, np.unique(lower))
    return peaks


def _flat_cores(bends, tame, fwhm) -> np.ndarray:
    """Curvature maxima with the two shoulders of one flat core replaced by its middle.

    A broad core with a flat bottom bends most at its rims. Two neighbours are rims when
    the signal half-way between them exceeds that at both; the members of a blend have a
    saddle there, and a shoulder lies below the line beside it.
    """
    bends = list(bends)
    i = 0
    while i + 1 < len(bends):
        a, b = bends[i], bends[i + 1]
        quarter = (b - a) // 4
        middle = tame[a + quarter : b - quarter + 1]
        rim = max(tame[a], tame[b])
        if b - a < 40 * fwhm[a] and middle.max() > rim and np.median(middle) > rim:
            bends[i : i + 2] = [(a + b) // 2]
            i = max(i - 1, 0)
        else:
            i += 1
    return np.array(bends, dtype=int)


def _apart(lone, bends, curve) -> np.ndarray:
    """The lone maxima that no curvature feature stands for already.

    Joined are two that no inflection separates: the curvature keeps its sign between.
    """
    if not len(bends) or not len(lone):
        return lone
    hollow = np.r_[0, np.cumsum(curve <= 0)]
    place = np.searchsorted(bends, lone)
    joined = np.zeros(len(lone), dtype=bool)
    for side in (np.maximum(place - 1, 0), np.minimum(place, len(bends) - 1)):
        low = np.minimum(lone, bends[side])
        high = np.maximum(lone, bends[side]) + 1
        joined |= hollow[high] == hollow[low]
    return lone[~joined]
