"""Velocity residuals: how far confident claims lie from the velocity of their component."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..session.model import Session
from ..spectra.medium import C_KM_S

CONFIDENT = ("firm", "likely")
ORIGINS = ("stellar", "nebular")
CLIP = 4.0  # scatters
MAD_TO_SIGMA = 1.4826  # of a normal distribution
MEDIAN_TO_MEAN = 1.2533  # error of a median over that of a mean, normal distribution
STRETCH, MOST_STRETCHES = 12, 16  # rows; number


@dataclass(frozen=True, eq=False)
class Residuals:
    """One row a confident claim, arrays of shape (n,).

    number: of the feature; wave: vacuum Angstrom; e_low: eV (NaN unknown)
    offset: c (feature/line - 1) less the velocity of the line's component, km/s; error: of
        the offset, from the feature and the laboratory wavelength together
    """

    number: np.ndarray
    wave: np.ndarray
    e_low: np.ndarray
    offset: np.ndarray
    error: np.ndarray
    species: tuple[str, ...]
    origin: tuple[str, ...]

    def __len__(self) -> int:
        return len(self.number)

    @property
    def middle(self) -> float:
        """Median offset, km/s; NaN without rows."""
        return float(np.median(self.offset)) if len(self) else float("nan")

    @property
    def scatter(self) -> float:
        """1.4826 times the median absolute deviation, km/s."""
        if not len(self):
            return float("nan")
        return MAD_TO_SIGMA * float(np.median(np.abs(self.offset - self.middle)))


def residuals(session: Session) -> Residuals:
    """The firm and likely claims of the object itself; air and clouds move on their own."""
    f = session.features
    rows = [i for i, c in enumerate(session.claims)
            if c.standing in CONFIDENT and c.origin in ORIGINS and c.line is not None
            and np.isfinite(c.line.wave) and np.isfinite(c.line.velocity)]
    lines = [session.claims[i].line for i in rows]
    rest, err, e_low, v = (np.array([getattr(c, name) for c in lines], dtype=float)
                           for name in ("wave", "wave_err", "e_low", "velocity"))
    wave = f.wave[rows]
    error = C_KM_S * np.hypot(np.nan_to_num(f.wave_err[rows]) / wave, np.nan_to_num(err) / rest)
    return Residuals(f.number[rows], wave, e_low, C_KM_S * (wave / rest - 1.0) - v, error,
                     tuple(c.species for c in lines), tuple(session.claims[i].origin for i in rows))


def trend(x: np.ndarray, offset: np.ndarray) -> tuple[float, float, float]:
    """(offset at x = 0, slope, error of the slope) of a straight line by least squares.

    Rows beyond CLIP scatters of the median are left out; NaN with fewer than five rows.
    """
    good = np.isfinite(x) & np.isfinite(offset)
    if np.count_nonzero(good) >= 5:
        middle = np.median(offset[good])
        scatter = MAD_TO_SIGMA * np.median(np.abs(offset[good] - middle))
        good &= np.abs(offset - middle) <= CLIP * max(float(scatter), 1e-12)
    if np.count_nonzero(good) < 5 or np.ptp(x[good]) == 0:
        return (float("nan"),) * 3
    about = x[good] - x[good].mean()
    slope = float(np.sum(about * offset[good]) / np.sum(about**2))
    start = float(offset[good].mean() - slope * x[good].mean())
    rest = offset[good] - start - slope * x[good]
    error = np.sqrt(np.sum(rest**2) / (len(rest) - 2) / np.sum(about**2))
    return start, slope, float(error)


def steps(x: np.ndarray, offset: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """(edges, median, error) of the offsets in stretches of equal number of rows, (k + 1,) and
    (k,): where a part of the wavelength scale stands off the rest.

    A stretch has STRETCH rows or more, of which there are at most MOST_STRETCHES; the error is
    that of a median of normal offsets with the scatter of the stretch. Nothing below two.
    """
    good = np.isfinite(x) & np.isfinite(offset)
    order = np.argsort(x[good], kind="stable")
    x, offset = x[good][order], offset[good][order]
    count = min(len(x) // STRETCH, MOST_STRETCHES)
    if count < 2:
        return np.zeros(0), np.zeros(0), np.zeros(0)
    parts, places = np.array_split(offset, count), np.array_split(x, count)
    middle = np.array([np.median(p) for p in parts])
    scatter = [MAD_TO_SIGMA * np.median(np.abs(p - m)) for p, m in zip(parts, middle)]
    error = MEDIAN_TO_MEAN * np.array(scatter) / np.sqrt([len(p) for p in parts])
    between = [0.5 * (a[-1] + b[0]) for a, b in zip(places, places[1:])]
    return np.array([x[0], *between, x[-1]]), middle, error


def steps_words(edges, middle, error) -> str:
    """The stretch that stands out most from the median of all, in words; empty without any."""
    if not len(middle):
        return ""
    away = middle - np.median(middle)
    k = int(np.argmax(np.abs(away) / np.maximum(error, 1e-9)))
    size = f"{away[k]:+.3f}".replace("-", "−")
    return (f"the stretch {edges[k]:.0f}–{edges[k + 1]:.0f} Å stands off most, by "
            f"{size} ± {error[k]:.3f} km/s")
