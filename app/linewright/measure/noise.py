"""Noise of a sample, from the pixels, where neighbours may be correlated.

Stoehr et al. 2008 (ASP Conf. 394, 505) estimate the noise from second differences of
samples two apart (DER_SNR), which is right for independent samples. Here second
differences are taken at several lags k. For stationary noise of autocorrelation r,

    var(2 F_i - F_{i-k} - F_{i+k}) = sigma^2 (6 - 8 r_k + 2 r_2k),

so their robust scatter D_k rises with k up to the lag where samples are independent and
stays there: that plateau is sigma, and the rise gives r. Lines make D_k rise further,
which is why only the quietest blocks decide about the shape.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .floor import noise_floor

MAD = 1.482602
LAGS = tuple(range(1, 17))
PLATEAU = 0.9
TAILS = (2.2, 3.3)  # of differences that may pass for noise
STILL = 1.2  # rise beyond the plateau that correlation alone may bring


def der_snr(flux) -> tuple[float, float]:
    """(signal-to-noise, noise) of Stoehr et al. 2008 for independent samples, lag 2."""
    flux = np.asarray(flux, dtype=float)
    noise = float(np.median(np.abs(second_difference(flux, 2)))) * MAD
    return float(np.median(flux)) / noise, noise


def second_difference(flux: np.ndarray, lag: int) -> np.ndarray:
    """(2 F_i - F_{i-lag} - F_{i+lag}) / sqrt(6), shape (n - 2 lag,)."""
    return (2.0 * flux[lag:-lag] - flux[: -2 * lag] - flux[2 * lag :]) / np.sqrt(6.0)


@dataclass(frozen=True, eq=False)
class Noise:
    """sigma: one sigma per sample, shape (n,); correlation: r_0 = 1, r_1, ...; lag: plateau;
    like: False where the quietest stretches have not the tails of noise."""

    sigma: np.ndarray
    correlation: np.ndarray
    lag: int
    like: bool = True


def _differences(flux, good, runs, lag):
    """|second differences| * MAD placed on their middle sample, NaN elsewhere."""
    out = np.full(len(flux), np.nan)
    for run in runs:
        if run.stop - run.start <= 2 * lag:
            continue
        part, ok = flux[run], good[run]
        value = np.abs(second_difference(part, lag)) * MAD
        fine = ok[lag:-lag] & ok[: -2 * lag] & ok[2 * lag :]
        out[run.start + lag : run.stop - lag] = np.where(fine, value, np.nan)
    return out


def block_medians(values: np.ndarray, size: int, least: int) -> tuple[np.ndarray, np.ndarray]:
    """(centre indices, medians of the finite values) of blocks of ``size`` samples.

    Blocks with fewer than ``least`` finite values give NaN.
    """
    count = max(1, round(len(values) / size))
    width = -(-len(values) // count)
    grid = np.full(count * width, np.nan)
    grid[: len(values)] = values
    grid = np.sort(grid.reshape(count, width), axis=1)
    filled = np.isfinite(grid).sum(axis=1)
    rows = np.arange(count)
    middle = 0.5 * (grid[rows, np.maximum(filled - 1, 0) // 2] + grid[rows, filled // 2 % width])
    centre = np.minimum(rows * width + 0.5 * (width - 1), len(values) - 1)
    return centre, np.where(filled >= max(least, 1), middle, np.nan)


def quiet_profile(flux, good, runs, share: float = 0.25) -> np.ndarray:
    """D_k at LAGS, the median over the quietest ``share`` of blocks, shape (len(LAGS),).

    Choosing quiet blocks biases the level low by some per cent; with share 1 nothing is.
    """
    table = np.array([
        block_medians(_differences(flux, good, runs, lag), 128, 40)[1] for lag in LAGS
    ])
    if not np.any(np.isfinite(table)):
        return np.full(len(LAGS), np.nan)
    rank = np.mean(table[3:8], axis=0)
    rank = np.where(np.isfinite(rank), rank, np.inf)
    rank = np.where(rank > 0, rank, np.inf)
    if not np.any(np.isfinite(rank)):
        return np.full(len(LAGS), np.nan)
    rank = np.where(np.isfinite(table).all(axis=0), rank, np.inf)
    if not np.any(np.isfinite(rank)):
        return np.full(len(LAGS), np.nan)
    keep = np.argsort(rank)[: max(1, int(np.isfinite(rank).sum() * share))]
    # ratios, so that a quiet block of low flux does not rule the others
    relative = table[:, keep] / rank[keep]
    return np.median(relative, axis=1) * np.median(rank[keep])


def plateau(profile: np.ndarray, longest: float) -> int:
    """Smallest lag whose D_k no longer rises up to twice the lag; 1 when none is found."""
    for i, lag in enumerate(LAGS):
        if lag > longest:
            break
        later = [
            d for k, d in zip(LAGS, profile)
            if lag < k <= max(2 * lag, lag + 1) and np.isfinite(d)
        ]
        if later and profile[i] >= PLATEAU * max(later):
            return lag
    return 1


def _like_noise(flux, good, runs, lag: int) -> bool:
    """Whether second differences at ``lag`` have the tails of a Gaussian.

    The 90th percentile over the median of |normal| is 2.44; sparse lines raise it, a
    wood of lines lowers it. Judged over the quietest quarter of blocks of 128 samples.
    """
    values = _differences(flux, good, runs, lag)
    count = len(values) // 128
    grid = values[: count * 128].reshape(count, 128)
    grid = grid[np.isfinite(grid).all(axis=1)]
    if len(grid) < 4:
        return True
    middle = np.median(grid, axis=1)
    quiet = np.argsort(middle)[: len(grid) // 4 + 1]
    tail = np.percentile(grid[quiet] / np.maximum(middle[quiet, None], 1e-300), 90)
    return bool(TAILS[0] < tail < TAILS[1])


def _steep(flux, good, runs) -> bool:
    """Whether the highest frequencies lack what only correlation takes from them."""
    floor = noise_floor(flux, good, runs)
    return floor is not None and not floor.bound


def settled(profile: np.ndarray, lag: int, longest: float) -> int:
    """Up to twice the plateau's first lag, where samples are surely independent.

    Only where D_k stays put on the way: a further rise is the work of lines.
    """
    if lag == 1:
        return 1
    for later in range(int(min(2 * lag, LAGS[-1], longest)), lag, -1):
        if np.max(profile[lag:later]) <= STILL * profile[lag - 1]:
            return later
    return lag


def correlation_from(profile: np.ndarray, lag: int) -> np.ndarray:
    """Autocorrelation r_0..r_lag from D_k by r_k = (6 - 6 (D_k/D_lag)^2 + 2 r_2k) / 8."""
    if lag == 1:
        return np.array([1.0])
    known = dict(zip(LAGS, profile))
    r = np.zeros(2 * lag + 1)
    r[0] = 1.0
    for k in range(lag - 1, 0, -1):
        r[k] = np.clip((6.0 - 6.0 * (known[k] / known[lag]) ** 2 + 2.0 * r[2 * k]) / 8.0, 0, 0.99)
    return r[:lag]


def estimate_noise(flux, good, runs, quiet=None, longest=16.0, sure=False) -> Noise:
    """Local noise of one segment.

    flux: any unit, shape (n,); good: usable samples; runs: slices without gaps;
    quiet: samples free of features (None at first: all); longest: largest lag allowed
    in samples (a part of the line width: beyond, lines look like noise); sure: enough
    is quiet to follow the correlation further.
    """
    free = good if quiet is None else good & quiet
    profile = quiet_profile(flux, free, runs, 1.0 if sure else 0.25)
    if not np.all(np.isfinite(profile[:2])):
        profile = quiet_profile(flux, good, runs)
        free = good
    lag = plateau(profile, longest)
    like = lag == 1 or sure or _like_noise(flux, free, runs, lag) or _steep(flux, good, runs)
    lag = lag if like else 1
    if sure:
        lag = settled(profile, lag, longest)
    correlation = correlation_from(profile, lag)
    sigma = _local(_values(flux, free, runs, lag, profile), flux, lag)
    if free is not good:
        # where nothing is quiet: the shortest lag, least touched by lines
        bound = short_scatter(flux, good, runs, np.r_[correlation, 0.0, 0.0], lag)
        sigma = np.where(np.isfinite(sigma), np.minimum(sigma, 1.5 * bound), bound)
    return Noise(sigma, correlation, lag, like)


def short_scatter(flux, good, runs, r, lag: int = 1) -> np.ndarray:
    """Noise, (n,), from the scatter of second differences at lag 1, which lines raise least;
    r: the noise's autocorrelation at lags 0, 1, 2, ...; lag: stretches the blocks."""
    short = _differences(flux, good, runs, 1) / np.sqrt((6 - 8 * r[1] + 2 * r[2]) / 6)
    return _local(short, flux, lag)


def _values(flux, free, runs, lag, profile):
    """Scatter of single samples: DER_SNR's own lag 2 where lag 1 agrees with it."""
    used = max(lag, 2) if lag > 1 or profile[0] >= PLATEAU * profile[1] else 1
    return _differences(flux, free, runs, used)


def _local(values: np.ndarray, flux, lag: int) -> np.ndarray:
    """Medians of blocks, joined by straight lines; all-sample median where none is filled."""
    size = int(max(200, min(1000, len(flux) // 12)) * max(1.0, 0.4 * lag))
    centre, medians = block_medians(values, size, min(100, max(8, size // 10)))
    fine = np.isfinite(medians)
    if not fine.any():
        finite = values[np.isfinite(values)]
        return np.full(len(values), np.median(finite) if len(finite) >= 20 else np.nan)
    return np.interp(np.arange(len(values)), centre[fine], medians[fine])
