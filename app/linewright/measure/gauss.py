"""Sums of Gaussians fitted to many windows at once (Levenberg-Marquardt, numpy only).

Model of a window of n components, y = (continuum - flux)/continuum:
    m(x) = sum a_j exp(-(x - c_j)^2 / (2 s_j^2)),  parameters (a_j, c_j, ln s_j).
Derivatives are analytic. Windows of one batch hold equally many samples; those beyond a
window's own end have weight zero.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

GAUSSIAN_AREA = 1.0644670194312262  # area / (height FWHM) = sqrt(pi / ln 2) / 2
FWHM_PER_SIGMA = 2.3548200450309493
SMALL = 0.25  # errors: the largest bias that is taken off


@dataclass(frozen=True, eq=False)
class Windows:
    """A batch of g windows of p samples: x, y, weight (1/noise, 0: unused), each (g, p)."""

    x: np.ndarray
    y: np.ndarray
    weight: np.ndarray

    def take(self, which) -> Windows:
        return Windows(self.x[which], self.y[which], self.weight[which])


@dataclass(frozen=True, eq=False)
class Fit:
    """params (g, n, 3): a, c, ln s; covariance (g, 3n, 3n); chi2 (g,); converged (g,)."""

    params: np.ndarray
    covariance: np.ndarray
    chi2: np.ndarray
    converged: np.ndarray


def profiles(x, params):
    """Model sums (g, p) and derivatives (g, p, n, 3) at x (g, p)."""
    a, c, s = params[..., 0], params[..., 1], np.exp(params[..., 2])
    u = (x[:, :, None] - c[:, None, :]) / s[:, None, :]
    slopes = np.empty((*u.shape, 3))
    shape = np.exp(-0.5 * np.minimum(u * u, 1400.0))
    part = a[:, None, :] * shape
    bent = part * u
    slopes[..., 0], slopes[..., 1], slopes[..., 2] = shape, bent / s[:, None, :], bent * u
    return part.sum(axis=2), slopes


def _normal(windows, params):
    """Residual chi2 (g,), normal matrix (g, k, k), gradient (g, k), weighted slopes."""
    model, slopes = profiles(windows.x, params)
    z = slopes.reshape(*slopes.shape[:2], -1)
    z *= windows.weight[:, :, None]
    r = (windows.y - model) * windows.weight
    zt = z.transpose(0, 2, 1)
    return (r * r).sum(axis=1), zt @ z, (zt @ r[:, :, None])[:, :, 0], z


def fit_windows(windows: Windows, start, low, high, rounds: int = 25) -> Fit:
    """Least squares in every window; start, low, high: (g, n, 3) with bounds kept.

    Marquardt's damping by the diagonal, per window; windows that stopped are left out
    of later rounds. The covariance assumes independent samples (see ``spread_noise``).
    """
    params = np.clip(start, low, high).astype(float)
    g, n, _ = params.shape
    damping = np.full(g, 1e-2)
    chi2, matrix, gradient, _ = _normal(windows, params)
    active, part = np.ones(g, dtype=bool), windows
    for _ in range(rounds):
        on = np.flatnonzero(active)
        if not len(on):
            break
        step = _solve(matrix[on], gradient[on], damping[on])
        trial = np.clip(params[on] + step.reshape(-1, n, 3), low[on], high[on])
        if len(on) < len(part.x):  # windows only ever drop out
            part = windows.take(on)
        new, new_matrix, new_gradient, _ = _normal(part, trial)
        better = new <= chi2[on]
        gained = chi2[on] - new
        yes = on[better]
        params[yes], matrix[yes], gradient[yes] = (
            trial[better], new_matrix[better], new_gradient[better],
        )
        chi2[yes] = new[better]
        damping[on] = np.where(better, damping[on] * 0.2, damping[on] * 8.0)
        done = (np.abs(gained) < 1e-3 * (1.0 + 1e-3 * new)) | (damping[on] > 1e6)
        active[on[done]] = False
    return Fit(params, _inverse(matrix), chi2, ~active)


def _damped(matrix, damping):
    diagonal = np.einsum("gii->gi", matrix)
    floor = 1e-12 * diagonal.max(axis=1, keepdims=True) + 1e-300
    extra = np.maximum(diagonal, floor) * damping[:, None] + floor
    out = matrix.copy()
    np.einsum("gii->gi", out)[...] += extra
    return out


def _solve(matrix, gradient, damping):
    return np.linalg.solve(_damped(matrix, damping), gradient[:, :, None])[:, :, 0]


def _inverse(matrix):
    """Inverse with a whisper of damping, so that a degenerate window gives huge errors."""
    return np.linalg.inv(_damped(matrix, np.full(len(matrix), 1e-10)))


def spread_noise(windows: Windows, fit: Fit, correlation, level_err=None) -> np.ndarray:
    """Covariance (g, 3n, 3n) for correlated noise and a doubtful continuum.

    With z the slopes over the noise, A = z'z and R the correlation of the noise, least
    squares scatters by A^-1 (z' R z) A^-1. A continuum too high by a fraction e moves y
    by (1 - y) e, hence the parameters by A^-1 z'(1 - y) w e: added in quadrature for
    level_err (g,), one sigma of e.
    """
    *_, z = _normal(windows, fit.params)
    smeared = z.copy()
    for lag in range(1, len(correlation)):
        smeared[:, lag:] += correlation[lag] * z[:, :-lag]
        smeared[:, :-lag] += correlation[lag] * z[:, lag:]
    inverse = fit.covariance
    covariance = inverse @ (z.transpose(0, 2, 1) @ smeared) @ inverse
    if level_err is not None:
        push = ((1.0 - windows.y) * windows.weight)[:, :, None]
        moved = (inverse @ (z.transpose(0, 2, 1) @ push))[:, :, 0] * level_err[:, None]
        covariance = covariance + moved[:, :, None] * moved[:, None, :]
    return covariance


# A fit that failed has a covariance without bounds: its errors say so, no warning need.
@np.errstate(over="ignore", invalid="ignore", divide="ignore")
def lone_sensitivity(covariance, params, j: int):
    """(a, c, FWHM, area) errors of component j: shape (g, 4), from covariance (g, 3n, 3n)."""
    k = 3 * j
    block = covariance[:, k : k + 3, k : k + 3]
    a, s = params[:, j, 0], np.exp(params[:, j, 2])
    fwhm = FWHM_PER_SIGMA * s
    var_a, var_c, var_l = block[:, 0, 0], block[:, 1, 1], block[:, 2, 2]
    relative = var_a / np.maximum(a * a, 1e-30) + var_l + 2 * block[:, 0, 2] / np.where(
        a == 0, 1e-15, a)
    area = GAUSSIAN_AREA * np.abs(a) * fwhm * np.sqrt(np.maximum(relative, 0))
    return np.stack([np.sqrt(np.abs(var_a)), np.sqrt(np.abs(var_c)),
                     fwhm * np.sqrt(np.abs(var_l)), area], axis=1)


@np.errstate(over="ignore", invalid="ignore", divide="ignore")
def first_order_bias(windows: Windows, fit: Fit) -> np.ndarray:
    """Bias of least squares in (a, FWHM, area) of each component, (g, n, 3).

    Box 1971 (J. R. Stat. Soc. B 33, 171): with C the covariance, z the slopes over the
    noise and H_i the second derivatives at sample i, -C z' tr(C H_i) / 2; FWHM and area
    gain what the curvature of the exponential adds. For independent samples; clipped at
    SMALL errors and none where the error exceeds the value: the first order means nothing.
    """
    g, n, _ = fit.params.shape
    *_, z = _normal(windows, fit.params)
    bend = np.zeros(windows.x.shape)
    own = np.stack([fit.covariance[:, 3 * j : 3 * j + 3, 3 * j : 3 * j + 3] for j in range(n)], 1)
    for j in range(n):
        bend += _traced(windows.x, fit.params[:, j], own[:, j])
    pull = (z.transpose(0, 2, 1) @ (bend * windows.weight)[:, :, None])[:, :, 0]
    shift = -0.5 * (fit.covariance @ pull[:, :, None])[:, :, 0].reshape(g, n, 3)
    a, fwhm = fit.params[..., 0], FWHM_PER_SIGMA * np.exp(fit.params[..., 2])
    wider = shift[..., 2] + 0.5 * own[..., 2, 2]
    area = GAUSSIAN_AREA * fwhm * (shift[..., 0] + a * wider + own[..., 0, 2])
    bias = np.stack([shift[..., 0], fwhm * wider, area], axis=-1)
    error = np.stack([lone_sensitivity(fit.covariance, fit.params, j)[:, [0, 2, 3]]
                      for j in range(n)], axis=1)
    value = np.stack([a, fwhm, GAUSSIAN_AREA * a * fwhm], axis=-1)
    bias = np.where(error < np.abs(value), bias, 0.0)
    return np.clip(bias, -SMALL * error, SMALL * error)


def _traced(x, params, c) -> np.ndarray:
    """tr(C H) at samples x (g, p) of one component: params (g, 3), its C (g, 3, 3)."""
    a, s = params[:, 0, None], np.exp(params[:, 2, None])
    u = (x - params[:, 1, None]) / s
    shape = np.exp(-0.5 * np.minimum(u * u, 1400.0))
    c = c[..., None]
    mixed = 2 * c[:, 0, 1] * u / s + 2 * c[:, 0, 2] * u * u
    square = c[:, 1, 1] * (u * u - 1) / s**2 + (u * u - 2) * (
        2 * c[:, 1, 2] * u / s + c[:, 2, 2] * u * u)
    return shape * (mixed + a * square)
