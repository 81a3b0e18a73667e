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
    return float(np.sqrt(filtered_correlation(kernel, correlation, 0)))


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
    x = threshold + np.linspace(0.0, 8.0, 2001)
    density = np.exp(-0.5 * x**2) / np.sqrt(2.0 * np.pi)
    spread = np.sqrt(max(1.0 - rho**2, 1e-12))
    below = _normal_cdf((threshold - rho * x) / spread)
    return float(np.sum(density * below) * (x[1] - x[0]) - 0.5 * density[0] * below[0] * (x[1] - x[0]))


def _normal_cdf(x):
    from math import erf
    return 0.5 * (1.0 + np.vectorize(erf)(np.asarray(x) / np.sqrt(2.0)))


def expected_false(threshold: float, pieces) -> float:
    """False peaks and troughs expected in noise; pieces: (samples, rho of neighbours)."""
    return float(sum(2.0 * n * exceed_rate(threshold, rho) for n, rho in pieces))


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


def filtered(y, weight, kernel, gain: float) -> np.ndarray:
    """Signal-to-noise of the kernel's shape at each sample.

    y: (continuum - flux)/continuum with unusable samples filled, shape (n,); weight:
    1/noise, 0 where unusable; gain: noise of the filter on unit noise (noise_gain) over
    its white value, so that correlated noise is respected.
    """
    top = np.convolve(y * weight**2, kernel[::-1], mode="same")
    bottom = np.convolve(weight**2, kernel**2, mode="same")
    return top / np.sqrt(np.maximum(bottom, 1e-300)) / gain
