"""The curve that measured rows stand for, from the table alone."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .complexes import COMPOUND
from .gauss import FWHM_PER_SIGMA, GAUSSIAN_AREA
from .groups import component_sum

WINGED = {"voigt", "core-wings"}  # profiles, as the flags name them, wider than a Gaussian
FRONT = 1.02  # of the line's continuum: what lies before its emission has more behind it
STEPS = 40  # samples of a curve over the narrowest part


def _flagged(features, rows, words) -> np.ndarray:
    return np.array([bool(words & set(features.flags[i].split())) for i in rows], dtype=bool)


def level_of(features, rows, row: int) -> float:
    """Continuum (flux units) that the curve of ``rows`` about ``row`` is drawn from.

    Rows on a line with wings, and absorption on the emission of one line of several parts, have
    a continuum of their own; the curve is drawn from that of the line.
    """
    continuum = features.continuum[rows]
    parts = _flagged(features, rows, {COMPOUND})
    if parts.any():
        return float(continuum[parts].min())
    return float(continuum.max() if _flagged(features, rows, WINGED).any() else features.continuum[row])


def absorbed(features, rows, wave) -> np.ndarray:
    """The rows' profiles together at ``wave`` (n,), relative to ``level_of``.

    Gaussians, and for lines with wings the mixture of Gaussian and Lorentzian that has their
    depth, width and equivalent width. Beside lines with wings or of several parts depths, which
    are relative to what they stand on, are turned into depths below the line's continuum;
    absorption before emission takes its share of both.
    """
    parts = _flagged(features, rows, {COMPOUND})
    level = features.continuum[rows]
    before = parts & (features.depth[rows] > 0) & (level > FRONT * level[parts].min(initial=np.inf))
    if before.any():
        light = 1.0 - absorbed(features, rows[~before], wave)
        return 1.0 - light * (1.0 - _sum(features, rows[before], 1.0, wave))
    winged = _flagged(features, rows, WINGED)
    scaled = winged.any() or parts.any()
    return _sum(features, rows, level / level_of(features, rows, rows[0]) if scaled else 1.0, wave)


def _sum(features, rows, level, wave) -> np.ndarray:
    """Sum of the rows' profiles, their depths times ``level``."""
    winged = _flagged(features, rows, WINGED)
    sigma = features.fwhm[rows] / FWHM_PER_SIGMA
    params = np.c_[features.depth[rows] * level, features.wave[rows], np.log(sigma)]
    total = component_sum(wave, params[~winged])
    for i, depth in zip(rows[winged], params[winged, 0]):
        fwhm = features.fwhm[i]
        area = 1e-3 * features.ew[i] / (features.depth[i] * fwhm)
        part = float(np.clip((area - GAUSSIAN_AREA) / (0.5 * np.pi - GAUSSIAN_AREA), 0.0, 1.0))
        u = (wave - features.wave[i]) / (0.5 * fwhm)
        total += depth * (part / (1.0 + u * u) + (1.0 - part) * np.exp(-np.log(2.0) * u * u))
    return total


def compound_groups(features) -> list[np.ndarray]:
    """Rows of each line of several parts, the parts alone, by wavelength."""
    groups, open_, before = [], [], (-1, 0)
    for i, words in enumerate(features.flags):
        here = (int(features.segment[i]), int(features.component[i]))
        if here[1] == 0:
            continue
        if here[0] != before[0] or here[1] <= before[1]:
            groups.append(open_)
            open_ = []
        before = here
        if COMPOUND in words.split():
            open_.append(i)
    return [np.array(g) for g in [*groups, open_] if len(g) > 1]


@dataclass(frozen=True)
class Peaks:
    """The two peaks of one emission line. blue, red: vacuum Angstrom of the curve's maxima;
    height_...: over the continuum, in its units; each with its error."""

    blue: float
    blue_err: float
    red: float
    red_err: float
    height_blue: float
    height_blue_err: float
    height_red: float
    height_red_err: float

    @property
    def ratio(self) -> float:
        """V/R: height of the blue (violet) peak over that of the red one."""
        return self.height_blue / self.height_red

    @property
    def ratio_err(self) -> float:
        return abs(self.ratio) * float(np.hypot(self.height_blue_err / self.height_blue,
                                                self.height_red_err / self.height_red))

    @property
    def apart(self) -> float:
        """Separation, Angstrom."""
        return self.red - self.blue

    @property
    def apart_err(self) -> float:
        return float(np.hypot(self.blue_err, self.red_err))


def peaks_of(features, rows) -> Peaks | None:
    """The two highest peaks of the curve of ``rows``; None where it has not two.

    A peak's errors are those of the emission row nearest to it: what the parts share is left
    out.
    """
    bright = rows[features.sign[rows] < 0]
    if not len(bright):
        return None
    narrow = float(features.fwhm[rows].min())
    low, high = features.wave[rows].min() - narrow, features.wave[rows].max() + narrow
    low = min(low, float((features.wave - features.fwhm)[bright].min()))
    high = max(high, float((features.wave + features.fwhm)[bright].max()))
    x = np.linspace(low, high, int(np.clip(STEPS * (high - low) / narrow, 200, 20000)))
    y = -absorbed(features, rows, x)
    tops = np.flatnonzero((y[1:-1] > y[:-2]) & (y[1:-1] >= y[2:])) + 1
    tops = tops[np.argsort(-y[tops], kind="stable")][:2]
    if len(tops) < 2 or y[tops].min() <= 0:
        return None
    numbers = []
    for k in np.sort(tops):
        row = bright[int(np.argmin(np.abs(features.wave[bright] - x[k])))]
        numbers.append((float(x[k]), float(features.wave_err[row]), float(y[k]),
                        float(features.depth_err[row])))
    (blue, blue_err, v, v_err), (red, red_err, r, r_err) = numbers
    return Peaks(blue, blue_err, red, red_err, v, v_err, r, r_err)
