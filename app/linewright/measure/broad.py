"""Strong broad lines: width at half depth and equivalent width without a profile.

Na D, Mg b or the Balmer lines are no Gaussians. Their centre comes from a fit to the core;
the width is read off at half depth and the equivalent width is integrated out to where
the line has sunk into the continuum, the narrow lines on it taken off.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from .gauss import FWHM_PER_SIGMA
from .groups import BROAD, component_sum
from .guess import first_guess
from .veil import running_mean

FAINT = 0.01  # share of the central depth at which the integration ends
RISE = 0.06  # rise of a flank, as a share of the depth, that another line must cause
FARTHEST = 25.0  # widths from the centre at which it ends at the latest


@dataclass(frozen=True, eq=False)
class Integrated:
    """Broad features: rows of the table; fwhm, area and its error in Angstrom, each (k,)."""

    rows: np.ndarray
    fwhm: np.ndarray
    area: np.ndarray
    area_err: np.ndarray


def integrate_broad(trace, found, fitted) -> Integrated:
    """Widths and areas of the veil's sources that are broader than BROAD line widths."""
    rows = np.flatnonzero(found.own)
    if not len(rows):
        return Integrated(rows, *(np.zeros(0),) * 3)
    narrow = component_sum(trace.wave, fitted.params[~found.own])
    clear = replace(trace, y=trace.y - narrow)
    index = np.clip(np.searchsorted(trace.wave, fitted.params[rows, 1]), 0, len(trace.wave) - 1)
    smooth = int(max(1, np.round(0.3 * np.median(trace.width / np.gradient(trace.wave)))))
    start = first_guess(clear, index, found.sign[rows], np.ones(len(rows), dtype=bool), smooth)
    fwhm = FWHM_PER_SIGMA * np.exp(start[:, 2])
    fitted_width = FWHM_PER_SIGMA * np.exp(fitted.params[rows, 2])
    broad = np.minimum(fwhm, fitted_width * 2.0) > BROAD * trace.width[index]
    rows, index, fwhm = rows[broad], index[broad], fwhm[broad]
    tame = running_mean(clear.y, smooth + 1 - smooth % 2)
    areas = [
        _area(clear, tame, i, s, w, found.limits[r])
        for r, i, s, w in zip(rows, index, found.sign[rows], fwhm, strict=True)
    ]
    area, error = np.array(areas).reshape(-1, 2).T
    return Integrated(rows, fwhm, area, error)


def _area(trace, tame, index, sign, fwhm, limits):
    """(area, error) in Angstrom of one line, integrated out to its feet."""
    step = np.gradient(trace.wave[max(0, index - 2) : index + 3]).mean()
    reach = int(FARTHEST * fwhm / step)
    foot = max(FAINT * abs(tame[index]), 2.0 * trace.noise[index] / 3.0)
    z = sign * tame
    index = int(np.clip(index, limits[0], limits[1] - 1))  # a fit may end beyond the stretch
    left = _foot(z[max(limits[0], index - reach) : index + 1][::-1], foot)
    right = _foot(z[index : min(limits[1], index + reach)], foot)
    span = slice(index - left, index + right + 1)
    dx = np.gradient(trace.wave[span]) if right + left > 1 else np.array([step])
    length = 1.0 + 2.0 * trace.correlation[1:].sum()
    noise = np.sqrt(length * np.sum((trace.noise[span] * dx) ** 2))
    level = trace.level_err[index] * np.sum((1.0 - trace.y[span]) * dx)
    return np.sum(trace.y[span] * dx), np.hypot(noise, level)


def _foot(z, foot: float) -> int:
    """Samples until the flank z falls below ``foot`` or turns up by RISE of its start."""
    end = (z < foot) | (z > np.minimum.accumulate(z) + RISE * abs(z[0]))
    return int(np.argmax(end)) if end.any() else len(z) - 1
