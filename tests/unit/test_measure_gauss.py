"""The Gaussian fit: derivatives, Fisher matrix, published coefficients, a reference fitter."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.measure.gauss import (
    FWHM_PER_SIGMA,
    GAUSSIAN_AREA,
    Windows,
    fit_windows,
    first_order_bias,
    lone_sensitivity,
    profiles,
    spread_noise,
)

WHITE = np.array([1.0])


def _wide_bounds(start):
    low, high = start.copy(), start.copy()
    low[..., 0], high[..., 0] = -10, 10
    low[..., 1] -= 1.0
    high[..., 1] += 1.0
    low[..., 2] -= 2.0
    high[..., 2] += 2.0
    return low, high


def test_area_of_a_gaussian_line():
    # W = 1.0644670194 depth FWHM: sqrt(2 pi) / (2 sqrt(2 ln 2))
    assert pytest.approx(1.0644670194, abs=1e-10) == GAUSSIAN_AREA
    x = np.linspace(-5, 5, 100_001)
    sigma = 0.3 / FWHM_PER_SIGMA
    numeric = np.sum(0.5 * np.exp(-0.5 * (x / sigma) ** 2)) * (x[1] - x[0])
    assert numeric == pytest.approx(GAUSSIAN_AREA * 0.5 * 0.3, rel=1e-9)


def test_derivatives_against_differences():
    x = np.linspace(-2, 2, 81)[None, :]
    params = np.array([[[0.5, -0.3, np.log(0.2)], [-0.2, 0.4, np.log(0.4)]]])
    _, slopes = profiles(x, params)
    for j in range(2):
        for k in range(3):
            up, down = params.copy(), params.copy()
            up[0, j, k] += 1e-6
            down[0, j, k] -= 1e-6
            numeric = (profiles(x, up)[0] - profiles(x, down)[0]) / 2e-6
            assert np.allclose(slopes[:, :, j, k], numeric, atol=1e-8)


def test_errors_reach_the_published_coefficients():
    """Cayrel 1988 (IAU Symp. 132, 345): sigma_W = 1.503 sqrt(FWHM dx) / (S/N), which is
    the Fisher matrix of a three-parameter Gaussian: 1.502689; centre 0.692227."""
    fwhm, dx, snr, depth = 0.2, 0.005, 100.0, 0.4
    x = np.arange(-2, 2, dx)[None, :]
    start = np.array([[[depth, 0.0, np.log(fwhm / FWHM_PER_SIGMA)]]])
    y = profiles(x, start)[0]
    windows = Windows(x, y, np.full_like(y, snr))
    fit = fit_windows(windows, start, *_wide_bounds(start))
    errors = lone_sensitivity(spread_noise(windows, fit, WHITE), fit.params, 0)[0]
    unit = np.sqrt(fwhm * dx) / snr
    assert errors[3] / unit == pytest.approx(1.502689, rel=1e-4)
    assert errors[1] / (unit / depth) == pytest.approx(0.692227, rel=1e-4)


def test_errors_scatter_as_the_fits_do_in_correlated_noise():
    rng = np.random.default_rng(8)
    fwhm, dx, snr, depth = 0.12, 0.01, 60.0, 0.3
    x = np.tile(np.arange(-0.3, 0.3001, dx), (3000, 1))
    kernel = np.exp(-0.5 * np.arange(-6, 7) ** 2 / 1.2**2)
    kernel /= np.sqrt(np.sum(kernel**2))
    white = rng.standard_normal((len(x), x.shape[1] + 12))
    noise = np.array([np.convolve(row, kernel, "valid") for row in white])
    truth = np.array([[[depth, 0.0, np.log(fwhm / FWHM_PER_SIGMA)]]])
    y = profiles(x, np.tile(truth, (len(x), 1, 1)))[0] + noise / snr
    windows = Windows(x, y, np.full_like(y, snr))
    start = np.tile(truth, (len(x), 1, 1))
    fit = fit_windows(windows, start, *_wide_bounds(start))
    r = np.correlate(kernel, kernel, "full")[len(kernel) - 1 :]
    errors = lone_sensitivity(spread_noise(windows, fit, r), fit.params, 0)
    pulls = fit.params[:, 0, 1] / errors[:, 1]
    assert np.std(pulls) == pytest.approx(1.0, abs=0.05)
    # taken as white the errors would be too small by more than half
    plain = lone_sensitivity(spread_noise(windows, fit, WHITE), fit.params, 0)
    assert np.std(fit.params[:, 0, 1] / plain[:, 1]) > 1.6


def test_two_hundred_lines_agree_with_a_general_fitter():
    from scipy.optimize import curve_fit

    rng = np.random.default_rng(9)
    x = np.tile(np.linspace(-0.5, 0.5, 51), (200, 1))
    truth = np.stack([
        rng.uniform(0.2, 0.8, 200), rng.uniform(-0.03, 0.03, 200),
        np.log(rng.uniform(0.05, 0.1, 200)),
    ], axis=1)[:, None, :]
    y = profiles(x, truth)[0] + rng.normal(0, 0.02, x.shape)
    windows = Windows(x, y, np.full_like(y, 50.0))
    start = truth + 0.02
    fit = fit_windows(windows, start, *_wide_bounds(start))
    assert fit.converged.all()
    for k in range(200):
        best, cov = curve_fit(
            lambda v, a, c, s: a * np.exp(-0.5 * ((v - c) / np.exp(s)) ** 2),
            x[k], y[k], p0=truth[k, 0], sigma=np.full(51, 0.02), absolute_sigma=True,
        )
        error = np.sqrt(np.diag(cov))
        assert np.all(np.abs(fit.params[k, 0] - best) < 0.02 * error)
        assert np.allclose(np.sqrt(np.diag(fit.covariance[k])), error, rtol=0.02)


def test_a_pair_one_width_apart_is_taken_apart():
    x = np.linspace(-1, 1, 201)[None, :]
    sigma = 0.2 / FWHM_PER_SIGMA
    truth = np.array([[[0.5, -0.1, np.log(sigma)], [0.3, 0.1, np.log(sigma)]]])
    start = truth + np.array([[[0.1, 0.02, 0.1], [-0.1, -0.02, -0.1]]])
    windows = Windows(x, profiles(x, truth)[0], np.full_like(x, 100.0))
    fit = fit_windows(windows, start, *_wide_bounds(start), rounds=60)
    assert np.allclose(fit.params, truth, atol=1e-3)


@pytest.mark.parametrize("pixels", [3.0, 6.0])
def test_the_bias_of_least_squares_is_taken_off(pixels):
    """20,000 lines of significance 15 and 21: their mean is known to 0.007 of an error.
    Depth and area come out too large by 0.03 to 0.09 errors, as Box (1971) predicts."""
    rng = np.random.default_rng(6)
    n, noise, reach = 20_000, 0.01, int(1.3 * pixels) + 2
    x = np.tile(np.arange(-reach, reach + 1.0), (n, 1))
    truth = np.stack(
        [np.full(n, 0.1), rng.uniform(-0.5, 0.5, n), np.full(n, np.log(pixels / 2.3548))], axis=1)
    truth = truth[:, None, :]
    y = profiles(x, truth)[0] + noise * rng.standard_normal(x.shape)
    windows = Windows(x, y, np.full(x.shape, 1 / noise))
    room = np.array([0.1, pixels, 1.0])
    fit = fit_windows(windows, truth, truth - room, truth + room)
    bias = first_order_bias(windows, fit)[:, 0]
    a, fwhm = fit.params[:, 0, 0], 2.35482 * np.exp(fit.params[:, 0, 2])
    plain = np.stack([a, fwhm, 1.0644670 * a * fwhm], axis=1)
    wanted = np.array([0.1, pixels, 1.0644670 * 0.1 * pixels])
    spread = plain.std(axis=0)
    before, after = ((v - wanted).mean(axis=0) / spread for v in (plain, plain - bias))
    assert before[0] > 0.05 and before[2] > 0.02
    assert np.all(np.abs(after) < 0.025)
