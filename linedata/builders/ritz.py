"""Matches listed lines to pairs of energy levels and gives their Ritz wavelengths."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from nist_levels import Levels

# E_low is printed to 0.001 eV (4 cm-1 half width). Most rows of the list were converted with
# 8071.7 cm-1 per eV (median of level / E_low over 3,600 Fe I lines), some with 8065.54.
E_LOW_TOLERANCE = 6.0  # cm-1
CM_PER_EV = 8065.543937
CM_PER_EV_LISTED = 8071.7
WAVENUMBER_TOLERANCE = 0.5  # cm-1
WAVE_TOLERANCE = 0.05  # Angstrom
# Second look at lines left without a pair: levels and lines both free, one electron's jump.
FAR_WAVE, FAR_WAVENUMBER, FAR_RIVAL = 0.12, 1.5, 0.25  # Angstrom at 5000 A, cm-1, Angstrom
# Third look: upper levels the list has elsewhere, told by lines that all miss alike.
SHIFT_REACH, SHIFT_WIDTH, SHIFT_LINES = 1.5, 0.04, 4  # cm-1, cm-1, lines
RIVAL_RATIO = 3.0  # a second pair must miss by this factor more, and by 0.02 A at least
FLOOR = 4e-7  # relative: 0.002 A at 5000 A


@dataclass
class Matches:
    """For n lines: row of the lower and upper level (-1 none), Ritz wavelength and error."""

    low: np.ndarray
    up: np.ndarray
    wave: np.ndarray
    error: np.ndarray


def _allowed(levels: Levels, low: int, ups: np.ndarray) -> np.ndarray:
    """Electric-dipole rules on parity and J; an unknown J is let through."""
    j_low, j_up = levels.j[low], levels.j[ups]
    unknown = np.isnan(j_up) | np.isnan(j_low)
    with np.errstate(invalid="ignore"):
        step = (np.abs(j_up - j_low) <= 1.0) & ~((j_up == 0) & (j_low == 0))
    return (levels.odd[ups] != levels.odd[low]) & (unknown | step)


def _candidates(levels: Levels, wave: float, e_low: float, reach: float | None = None):
    """(miss in Angstrom, low, up) of every permitted level pair near one line.

    reach: how far (Angstrom); by default WAVE_TOLERANCE or WAVENUMBER_TOLERANCE.
    """
    lowest = e_low * CM_PER_EV - E_LOW_TOLERANCE
    highest = e_low * CM_PER_EV_LISTED + E_LOW_TOLERANCE
    lows = np.searchsorted(levels.energy, [lowest, highest])
    sigma = 1e8 / wave
    tolerance = min(WAVENUMBER_TOLERANCE, WAVE_TOLERANCE * sigma / wave)
    if reach is not None:
        tolerance = reach * sigma / wave
    found = []
    for low in range(*lows):
        top = levels.energy[low] + sigma
        span = np.searchsorted(levels.energy, [top - tolerance, top + tolerance])
        ups = np.arange(*span)
        for up in ups[_allowed(levels, low, ups)] if len(ups) else ():
            ritz = 1e8 / (levels.energy[up] - levels.energy[low])
            found.append((abs(ritz - wave), low, int(up)))
    return sorted(found)


def match_lines(levels: Levels, wave: np.ndarray, e_low_ev: np.ndarray) -> Matches:
    """Unambiguous level pairs of lines given by vacuum wavelength and E_low (levels sorted)."""
    n = len(wave)
    result = Matches(np.full(n, -1), np.full(n, -1), wave.copy(), np.full(n, np.nan))
    for k in range(n):
        found = _candidates(levels, wave[k], e_low_ev[k])
        if not found:
            continue
        miss = found[0][0]
        if len(found) > 1 and found[1][0] < max(RIVAL_RATIO * miss, 0.02 * wave[k] / 5000.0):
            continue
        _, low, up = found[0]
        _enter(levels, result, k, low, up)
    return result


def match_shifted(levels: Levels, wave, e_low_ev, matches: Matches) -> None:
    """Adds lines of upper levels whose energy in the list differs from the level file's.

    At least SHIFT_LINES unmatched lines, of different lower levels, must miss the level by the
    same wavenumber; and twice as many as at any other miss.
    """
    taken = {(a, b) for a, b in zip(matches.low, matches.up, strict=True) if a >= 0}
    misses: dict[int, list[tuple[float, int, int]]] = {}
    for k in np.flatnonzero(matches.low < 0):
        for _, low, up in _candidates(levels, wave[k], e_low_ev[k], SHIFT_REACH * wave[k] ** 2 * 1e-8):
            miss = 1e8 / wave[k] - (levels.energy[up] - levels.energy[low])
            if (low, up) not in taken and not _has_near_pair(levels, wave[k], e_low_ev[k], miss):
                misses.setdefault(up, []).append((miss, low, int(k)))
    for up, found in sorted(misses.items()):
        chosen = _alike(sorted(found))
        for _, low, k in chosen:
            if matches.low[k] < 0 and (low, up) not in taken:
                taken.add((low, up))
                _enter(levels, matches, k, low, up)


def _has_near_pair(levels: Levels, wave: float, e_low_ev: float, miss: float) -> bool:
    """Whether a permitted pair lies nearer to the line than a third of this miss (cm-1)."""
    found = _candidates(levels, wave, e_low_ev)
    return bool(found) and found[0][0] < abs(miss) / RIVAL_RATIO * wave**2 * 1e-8


def _alike(found: list[tuple[float, int, int]]) -> list[tuple[float, int, int]]:
    """The entries of the fullest window of misses; [] where it does not stand out."""
    groups = [
        [entry for entry in found if first[0] <= entry[0] < first[0] + SHIFT_WIDTH]
        for first in found
    ]
    sizes = [len({low for _, low, _ in group}) for group in groups]
    best = int(np.argmax(sizes))
    apart = [
        size for size, first in zip(sizes, found, strict=True)
        if abs(first[0] - found[best][0]) > SHIFT_WIDTH
    ]
    if sizes[best] < SHIFT_LINES or sizes[best] < 2 * max(apart, default=0):
        return []
    return groups[best]


def _enter(levels: Levels, result: Matches, k: int, low: int, up: int) -> None:
    """Notes a pair and its Ritz wavelength (vacuum) as the match of line k."""
    result.low[k], result.up[k] = low, up
    ritz = 1e8 / (levels.energy[up] - levels.energy[low])
    result.wave[k] = ritz
    spread = ritz**2 * 1e-8 * np.hypot(levels.error[low], levels.error[up])
    result.error[k] = np.hypot(spread, FLOOR * ritz)


def match_far(levels: Levels, wave, e_low_ev, loggf, matches: Matches, permitted) -> None:
    """Adds pairs to lines still without one whose listed wavelength is poor (strong ones first).

    permitted(low, up) tells whether selection rules on S, L and configuration allow the pair.
    """
    taken = {(a, b) for a, b in zip(matches.low, matches.up, strict=True) if a >= 0}
    for k in np.argsort(-loggf, kind="stable"):
        if matches.low[k] >= 0:
            continue
        reach = min(FAR_RIVAL * wave[k] / 5000.0, FAR_WAVENUMBER * wave[k] ** 2 * 1e-8 * 2.0)
        found = [
            pair for pair in _candidates(levels, wave[k], e_low_ev[k], reach)
            if pair[1:] not in taken and permitted(*pair[1:])
        ]
        if len(found) != 1:
            continue
        miss, low, up = found[0]
        limit = min(FAR_WAVE * wave[k] / 5000.0, FAR_WAVENUMBER * wave[k] ** 2 * 1e-8)
        if miss < limit:
            taken.add((low, up))
            _enter(levels, matches, k, low, up)


def sort_levels(levels: Levels) -> Levels:
    """The same levels by ascending energy."""
    order = np.argsort(levels.energy, kind="stable")
    return Levels(
        levels.energy[order], levels.error[order], levels.j[order], levels.odd[order],
        levels.configuration[order], levels.term[order],
    )
