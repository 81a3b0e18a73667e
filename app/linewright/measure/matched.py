"""Matched filters along a stretch of samples, their noise and their false alarms."""

from __future__ import annotations

import numpy as np

SIGMA_PER_FWHM = 1.0 / 2.354820045


def gaussian_kernel(fwhm: float) -> np.ndarray:
    """Gaussian of ``fwhm`` samples, peak 1, out to 3 sigma, odd length."""
    sigma = fwhm * SIGMA_PER_FWHM
    half = max(1, int(np.ceil(3.0 * sigma)))
    x = np.arange(-half, half + 1)
    return np.exp(-0.5 * (x / sigma) ** 2)


def curvature_kernel(fwhm: float) -> np.ndarray:
    """Minus the second derivative of a Gaussian, zero sum: blind to level and slope."""
    sigma = fwhm * SIGMA_PER_FWHM
    half = max(2, int(np.ceil(4.0 * sigma)))
    x = np.arange(-half, half + 1) / sigma
    kernel = (1.0 - x**2) * np.exp(-0.5 * x**2)
    return kernel - kernel.mean()


def noise_gain(kernel: np.ndarray, correlation: np.ndarray) -> float:
    """Standard deviation of filtered unit noise with the given autocorrelation."""
    return float(np.sqrt(max(filtered_correlation(kernel, correlation, 0), 1e-12)))


def filtered_correlation(kernel, correlation, lag: int) -> float:
    """Autocovariance at ``lag`` of unit noise after the filter."""
    own = np.correlate(kernel, kernel, mode="full")
    both = np.r_[correlation[:0:-1], correlation]
    full = np.convolve(own, both)
    middle = len(full) // 2 + lag
    return float(full[middle]) if middle < len(full) else 0.0


def exceed_rate(threshold: float, rho: float) -> float:
    """Up-crossings of ``threshold`` per sample of unit Gaussian noise, neighbours at rho.

    P(z_i < u, z_i+1 >= u) by quadrature: the discrete form of Rice (1945, Bell Syst.
    Tech. J. 24, 46), which holds for coarse sampling too.
    """
    x = threshold + np.linspace(0.0, 8.0, 801)
    density = np.exp(-0.5 * x**2) / np.sqrt(2.0 * np.pi)
    spread = np.sqrt(max(1.0 - rho**2, 1e-12))
    rate = density * normal_cdf((threshold - rho * x) / spread)
    return float((rate.sum() - 0.5 * rate[0]) * (x[1] - x[0]))


def normal_cdf(x):
    """Gaussian integral, Abramowitz & Stegun 7.1.26 (error below 1e-7)."""
    z = np.abs(x) / np.sqrt(2.0)
    t = 1.0 / (1.0 + 0.3275911 * z)
    poly = t * (0.254829592 + t * (-0.284496736 + t * (
        1.421413741 + t * (-1.453152027 + t * 1.061405429))))
    tail = 0.5 * poly * np.exp(-z * z)
    return np.where(np.asarray(x) > 0, 1.0 - tail, tail)


def pooled(pieces):
    """Pieces of like correlation added up: (samples, rho) in steps of pi/256 of arccos(rho)."""
    sums: dict[int, float] = {}
    for n, rho in pieces:
        key = round(np.arccos(np.clip(rho, -1, 1)) * 64 / np.pi * 4)
        sums[key] = sums.get(key, 0.0) + n
    return [(n, float(np.cos(key * np.pi / 256))) for key, n in sums.items()]


def expected_false(threshold: float, pieces) -> float:
    """False peaks and troughs expected in noise; pieces: (samples, rho of neighbours)."""
    return float(sum(2.0 * n * exceed_rate(threshold, rho) for n, rho in pooled(pieces)))


def threshold_for(pieces, wanted: float = 1.0) -> float:
    """Significance at which ``wanted`` false features are expected, at least 3."""
    low, high = 3.0, 8.0
    if expected_false(low, pieces) <= wanted:
        return low
    for _ in range(30):
        middle = 0.5 * (low + high)
        if expected_false(middle, pieces) > wanted:
            low = middle
        else:
            high = middle
    return high
