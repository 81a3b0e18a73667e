"""Strong lines that may have several parts: where they are and which extrema they show."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .detect import distinct
from .veil import running_mean

BRIGHT, DEEP = 0.08, 0.35  # least height of emission, depth of absorption with a filled core
WIDE, WIDEST = 2.0, 150.0  # line widths at half height, between which a line is looked at
GAP, SPREAD = 5.0, 12.0  # widths at half height, or line widths, between two peaks at most
SAMPLES = 4000  # of a window, at most
CENTRAL, ALIKE = 0.25, 0.6  # widths at half depth of a bump off the middle; minima beside it
OWN = 1.6  # line widths of a peak, at least
CORES = 4  # minima of an absorption with a filled core, other lines among them
SPAN, SUNK = 1.2, 3.0  # widths at half height beyond either side; the same in absorption
LOW = 0.05  # of the swing: feet that far down are absorption
FOOT = 0.55  # of the swing: what the surroundings may stand off the continuum
MOST, DARK, ASKED = 12, 5, 60  # lines of a segment fitted, absorption among them; extrema looked at
SIGMAS = 6.0  # of the smoothed samples by which two extrema must be apart
DIP = 0.03  # of the higher extremum, the same


@dataclass(frozen=True, eq=False)
class Line:
    """One line to be looked at: first, last+1 sample of its window; sign of what is strong;
    wide: Angstrom at half height; middle: Angstrom; same, other: samples of extrema of that
    sign and of the other; sunk: emission that stands in absorption; highest: Angstrom of the two
    strongest extrema of its sign, by wavelength."""

    first: int
    last: int
    sign: int
    wide: float
    middle: float
    same: np.ndarray
    other: np.ndarray
    sunk: bool
    highest: tuple[float, ...]


def lines_to_look_at(ready):
    """Lines of a prepared segment that show more than one extremum, the strongest first."""
    t = ready.trace
    pixels = float(np.median(ready.fwhm_pixels))
    size = 2 * int(0.3 * pixels) + 1
    tame = running_mean(t.y, size)
    length = ready.nodes.correlation_length
    sigma = t.noise * np.sqrt(length / max(size, length))
    looked: list[tuple[int, int]] = []
    dark = 0
    for i, sign in _anchors(ready, tame, sigma):
        if len(looked) >= MOST or dark >= DARK:
            return
        if any(a <= i < b for a, b in looked):
            continue
        line = _line(t, tame, sigma, i, sign)
        if line is None or any(a < line.last and line.first < b for a, b in looked):
            continue
        looked.append((line.first, line.last))
        dark += sign > 0
        yield line


def _anchors(ready, tame, sigma):
    """(sample, sign) of strong extrema, strongest first within emission, then absorption."""
    t, out = ready.trace, []
    for sign, least in ((-1, BRIGHT), (1, DEEP)):
        s = sign * tame
        found = []
        for run in ready.runs:
            part = s[run]
            local = distinct(part, least, 0.3 * least) + run.start
            found += [int(k) for k in local if s[k] > SIGMAS * sigma[k] and t.good[k]]
        out += [(k, sign) for k in sorted(found, key=lambda k: (-s[k], k))[:ASKED]]
    return out


def _line(t, tame, sigma, i: int, sign: int) -> Line | None:
    """The line whose strongest extremum is sample i; None where it is simple or no such line."""
    s = sign * tame
    step = float(np.median(np.diff(t.wave[max(0, i - 5) : i + 6])))
    reach = min(int(WIDEST * t.width[i] / step), SAMPLES // 2)
    a, b = max(0, i - reach), min(len(s), i + reach + 1)
    least = SPREAD * t.width[i] / step if sign < 0 else 0.0
    left, right = _extent(s[a:b] > 0.5 * s[i], i - a, least)
    wide = float(t.wave[right + a] - t.wave[left + a])
    middle = 0.5 * float(t.wave[left + a] + t.wave[right + a])
    if not WIDE * t.width[i] < wide < WIDEST * t.width[i]:
        return None
    part = _window(t, tame, (middle, wide, sign))
    if part is None:
        return None
    drop = max(SIGMAS * float(np.median(sigma[part])), DIP * s[i])
    same = distinct(s[part], drop, drop) + part.start
    other = _other(tame, part, sign, drop, same)
    if sign > 0 and not _cored(t, s, (same, other), (middle, wide)):
        return None
    sunk = sign < 0 and t.wave[part.stop - 1] - t.wave[part.start] > 2 * SUNK * wide
    if sign < 0 and not sunk and not _resolved(s, i, OWN * t.width[i] / step):
        return None
    highest = np.sort(t.wave[same[np.argsort(-s[same], kind="stable")[:2]]])
    line = Line(part.start, part.stop, sign, wide, middle, same, other, sunk, tuple(highest.tolist()))
    return line if len(same) > 1 or len(other) else None


def _cored(t, s, extrema, about) -> bool:
    """Whether an absorption has a bump near its middle between minima alike, and is no crowd."""
    (same, other), (middle, wide) = extrema, about
    at = t.wave[same]
    core = np.sort(same[np.abs(at - middle) < 0.5 * wide])
    bumps = other[np.abs(t.wave[other] - middle) < CENTRAL * wide]
    if not 2 <= len(core) <= CORES or not len(bumps):
        return False
    k = int(bumps[np.argmin(np.abs(t.wave[bumps] - middle))])
    left, right = core[core < k], core[core > k]
    if not len(left) or not len(right):
        return False
    one, two = float(s[left].max()), float(s[right].max())
    return min(one, two) > ALIKE * max(one, two)


def _resolved(s, i: int, least: float) -> bool:
    """Whether the peak at sample i is wider at half height than ``least`` samples."""
    left, right = _extent(s > 0.5 * s[i], i, None)
    return right - left > least


def _window(t, tame, about) -> slice | None:
    """Samples about a line of (middle, width, sign), more of them where emission stands in
    absorption; None where they are too few or what is around is no continuum."""
    middle, wide, sign = about
    for span in (SPAN, SUNK):
        ends = [middle - (0.5 + span) * wide, middle + (0.5 + span) * wide]
        first, last = (int(k) for k in np.searchsorted(t.wave, ends))
        if last - first > SAMPLES or last - first < 12 or t.good[first:last].mean() < 0.9:
            return None
        edge = max((last - first) // 8, 2)
        feet = [float(np.median(tame[k])) for k in
                (slice(first, first + edge), slice(last - edge, last))]
        swing = float(np.ptp(tame[first:last]))
        if sign > 0 or min(feet) < LOW * swing:
            break
    return slice(first, last) if max(map(abs, feet)) < FOOT * swing else None


def _extent(over, at: int, least: float | None) -> tuple[int, int]:
    """First and last sample of what is over the half height about ``at``; gaps of GAP widths
    or ``least`` samples are bridged, none where that is None."""
    left = right = at
    while left > 0 and over[left - 1]:
        left -= 1
    while right < len(over) - 1 and over[right + 1]:
        right += 1
    for _ in range(0 if least is None else 2):
        gap = int(max(GAP * (right - left + 1), least))
        more = np.flatnonzero(over[right + 2 : right + 2 + gap])
        less = np.flatnonzero(over[max(left - 1 - gap, 0) : max(left - 1, 0)])
        if len(more):
            right += 2 + int(more[0])
            while right < len(over) - 1 and over[right + 1]:
                right += 1
        elif len(less):
            left = max(left - 1 - gap, 0) + int(less[-1])
            while left > 0 and over[left - 1]:
                left -= 1
        else:
            break
    return left, right


def _other(tame, part: slice, sign: int, drop: float, same) -> np.ndarray:
    """Extrema of the other sign: troughs of emission between its peaks or beside them."""
    t = -sign * tame[part]
    found = distinct(t - t.min(), drop, drop) + part.start
    inside = np.array([np.any(same < k) and np.any(same > k) for k in found], dtype=bool)
    below = np.array([-sign * tame[k] > drop for k in found], dtype=bool)
    return found[inside | below] if len(found) else found
