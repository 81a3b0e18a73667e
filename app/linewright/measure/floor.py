"""Noise at the highest frequencies, where no line of a sampled spectrum reaches.

A Gaussian line of sigma s samples falls off as exp(-(s w)^2 / 2) towards the Nyquist
frequency w = pi: at three samples per FWHM a ten-thousandth is left there. White noise has
the same power everywhere. So narrow bands, one at pi and others below it, that scatter
alike show the noise itself however crowded the lines are; a fall towards pi tells of
correlated samples (or of lines too narrow for their samples), and then nothing is said.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .matched import noise_gain

MAD = 1.482602
SPREAD = 2.5  # samples: sigma of the bands' envelope
BANDS = (1.0, 0.86, 0.72)  # of pi
ALIKE = 0.06  # difference of the two bands that white noise may show beside chance
SLIGHT = 0.63  # ratio of the first two bands that lines two samples wide may bring
SHARE = 0.08  # independent values of |band| per sample, as its median's scatter has it
LEAST = 150  # samples below which no verdict is reached
BLOCK = 1500
BLURS = np.linspace(0.05, 2.5, 99)  # samples
DIGITS = 3.0  # times the rounding noise below which the highest frequencies may be that


@dataclass(frozen=True, eq=False)
class Floor:
    """sigma: noise at the highest frequencies at every sample, (n,); fall: scatter there over
    that of the next band; white: whether that
    is the noise as a whole; flat: whether the third band agrees too (sure of it);
    bound: whether the fall is so slight that lines may cause it, not only correlation."""

    sigma: np.ndarray
    fall: float
    white: bool
    flat: bool
    bound: bool


def band_kernel(place: float) -> np.ndarray:
    """Cosine of frequency ``place`` pi under a Gaussian envelope, zero sum, unit noise gain."""
    j = np.arange(-12, 13)
    envelope = np.exp(-0.5 * (j / SPREAD) ** 2)
    kernel = np.cos(place * np.pi * j) * envelope
    kernel -= envelope * kernel.sum() / envelope.sum()
    return kernel / np.sqrt(np.sum(kernel**2))


def band_scatter(flux, good, runs, place: float) -> np.ndarray:
    """|band| * MAD at every sample with usable surroundings, NaN elsewhere, (n,)."""
    kernel = band_kernel(place)
    half = len(kernel) // 2
    out = np.full(len(flux), np.nan)
    for run in runs:
        if run.stop - run.start <= len(kernel):
            continue
        value = np.abs(np.convolve(flux[run], kernel, "valid")) * MAD
        holes = np.convolve(~good[run], np.ones(len(kernel)), "valid") > 0.5
        out[run.start + half : run.stop - half] = np.where(holes, np.nan, value)
    return out


def noise_floor(flux, good, runs) -> Floor | None:
    """Floor of one segment, or None where it is too short to tell.

    flux: any unit, (n,); good: usable samples; runs: slices without gaps.
    """
    bands = np.array([band_scatter(flux, good, runs, place) for place in BANDS])
    fine = np.flatnonzero(np.isfinite(bands).all(axis=0))
    if len(fine) < LEAST:
        return None
    blocks = np.array_split(fine, max(1, round(len(fine) / BLOCK)))
    at = np.array([b.mean() for b in blocks])
    level = np.array([np.median(bands[:, b], axis=1) for b in blocks])
    if not np.all(level > 0):
        return None
    ratio = np.median(level[:, 0] / level[:, 1:].T, axis=1)
    alike = np.abs(ratio - 1.0) < ALIKE + 3.0 / np.sqrt(SHARE * len(fine))
    sigma = np.interp(np.arange(len(flux)), at, level[:, 0])
    return Floor(sigma, float(ratio[0]), bool(alike[0]), bool(alike.all()), bool(ratio[0] > SLIGHT))


def blur_of(floor: Floor, sigma: np.ndarray) -> float:
    """Sigma in samples of the Gaussian that smoothed the noise; 0 where that explains nothing.

    sigma: the whole noise, (n,). The level at the highest frequencies and its fall towards
    them each give a sigma, which must agree.
    """
    level = float(np.median(floor.sigma / sigma))
    if floor.flat or level > 0.85 or not 0.0 < floor.fall < 1.0:
        return 0.0
    grid = np.linspace(0.3, 2.5, 45)
    top, below = np.array([[_passed(place, b) for b in grid] for place in BANDS[:2]])
    by_level = float(np.interp(-level, -top, grid))
    by_fall = float(np.interp(-floor.fall, -np.minimum.accumulate(top / below), grid))
    return by_level if 1 / 1.5 < by_level / by_fall < 1.5 else 0.0


def largest_blur(floor: Floor | None, flux) -> float | None:
    """Blur in samples that the fall towards the highest frequencies allows at most, for
    lines only steepen that fall; None where nothing is said, as where the last digits of
    the flux fill those frequencies."""
    if floor is None or np.median(floor.sigma) < DIGITS * _digit(flux):
        return None
    top, below = np.array([[_passed(place, b) for b in BLURS] for place in BANDS[:2]])
    blur = float(np.interp(-floor.fall, -np.minimum.accumulate(top / below), BLURS))
    return blur if blur < BLURS[-1] else None


def unblurred(floor: Floor, blur: float) -> np.ndarray:
    """Whole noise, (n,), of which ``floor`` is what a blur left at the highest frequencies."""
    return floor.sigma / _passed(BANDS[0], blur)


def _digit(flux) -> float:
    """Noise of rounding to the last digit: the smallest step between values over sqrt(12)."""
    values = np.unique(flux)
    return float(np.min(np.diff(values), initial=np.inf)) / np.sqrt(12.0) if len(values) > 1 else 0.0


def _passed(place: float, b: float) -> float:
    """Scatter in a band of unit noise smoothed by a Gaussian of sigma b samples."""
    return noise_gain(band_kernel(place), blurred(b))


def blurred(b: float) -> np.ndarray:
    """Autocorrelation r_0, r_1, ... of white noise smoothed by a Gaussian of sigma b samples."""
    lags = np.arange(int(np.ceil(8.0 * b)) + 1)
    return np.exp(-0.25 * (lags / b) ** 2)
