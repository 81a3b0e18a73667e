"""Several broad parts fitted together, and narrow lines on them: one window, one form.

A form is a tuple of (profile, sign): emission of two peaks, emission with absorption, and so
on. y = (continuum - flux)/continuum is their sum, but absorption after emission takes a share of
the light behind it: flux = (1 + emission) (1 - absorption). Narrow Gaussians are other lines.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .gauss import FWHM_PER_SIGMA
from .shapes import EXTRA, profile, width_and_area
from .veil import running_mean, running_min

MOST_NARROW, SEEDS = 6, 10
NARROWEST, NARROW = 0.3, 1.4  # line widths: of other lines, of the parts at least
FAR = 6.0  # sigmas of the smoothed residual at which another line is tried
LOCAL = 0.1  # of the parts' height there, the same: less may be their own misfit
DARK, LIT = 0.6, 0.3  # widest other line in absorption and emission, of the narrowest part


@dataclass(frozen=True, eq=False)
class View:
    """x, y, noise of the samples (n,); length: samples per independent noise value;
    correlation of the noise; width: of a line, Angstrom; level: one sigma of the continuum."""

    x: np.ndarray
    y: np.ndarray
    noise: np.ndarray
    correlation: np.ndarray
    width: float
    level: float

    @property
    def length(self) -> float:
        return float(1.0 + 2.0 * self.correlation[1:].sum())


@dataclass(frozen=True, eq=False)
class Compound:
    """form; parts: parameters (a, c, ln s, extra) of each; narrow (m, 3); chi2, count of
    parameters; slopes (n, k) of the model over the noise."""

    form: tuple
    parts: tuple[np.ndarray, ...]
    narrow: np.ndarray
    chi2: float
    slopes: np.ndarray

    @property
    def count(self) -> int:
        return self.slopes.shape[1]

    def broad(self, x):
        """The parts together at x (n,)."""
        return _together(self.form, [profile(s, x, p) for (s, _), p in zip(self.form, self.parts)])[0]

    def lit(self, x):
        """Emission over the continuum at x (n,)."""
        bright = (profile(s, x, p)[0] for (s, sign), p in zip(self.form, self.parts) if sign < 0)
        return -sum(bright, np.zeros(len(x)))

    def criterion(self, view: View, misfit: float) -> float:
        """Schwarz 1978, the noise raised by the misfit of the best model."""
        n = len(view.x) / view.length
        return self.chi2 / view.length / misfit + self.count * np.log(n)


def fit_compound(view: View, form, starts, narrow) -> Compound:
    """Least squares from ``starts``, one (a, c, FWHM) a part; narrow: (m, 3) a, c, ln s."""
    from scipy.optimize import least_squares

    begin, low, high = _bounds(view, form, starts, narrow)
    done = least_squares(
        lambda p: (_model(view.x, form, p)[0] - view.y) / view.noise,
        np.clip(begin, low + 1e-9, high - 1e-9),
        jac=lambda p: _model(view.x, form, p)[1] / view.noise[:, None],
        bounds=(low, high), x_scale="jac", max_nfev=60, ftol=1e-5, xtol=1e-6,
    )
    parts, rest = _split(form, done.x)
    return Compound(form, parts, rest.reshape(-1, 3), 2.0 * float(done.cost), done.jac)


def _split(form, flat):
    parts, k = [], 0
    for shape, _ in form:
        parts.append(flat[k : k + 3 + EXTRA[shape]])
        k += 3 + EXTRA[shape]
    return tuple(parts), flat[k:]


def behind(form) -> bool:
    """Whether the form's absorption stands before its emission."""
    return form[0][1] < 0 and form[-1][1] > 0


def _together(form, made):
    """(y, slopes) of parts given as (values, slopes)."""
    if not behind(form):
        return sum(v for v, _ in made), np.hstack([d for _, d in made])
    bright = 1.0 - sum(v for (v, _), (_, sign) in zip(made, form) if sign < 0)
    clear = 1.0 - sum(v for (v, _), (_, sign) in zip(made, form) if sign > 0)
    slopes = [d * (clear if sign < 0 else bright)[:, None] for (_, d), (_, sign) in zip(made, form)]
    return 1.0 - bright * clear, np.hstack(slopes)


def _model(x, form, flat):
    parts, rest = _split(form, flat)
    broad, slopes = _together(form, [profile(s, x, p) for (s, _), p in zip(form, parts)])
    lines = [profile("gaussian", x, p) for p in rest.reshape(-1, 3)]
    return broad + sum((v for v, _ in lines), 0.0), np.hstack([slopes, *(d for _, d in lines)])


def _bounds(view: View, form, starts, narrow):
    """(start, lowest, highest) of all parameters."""
    w, span = view.width / FWHM_PER_SIGMA, view.x[-1] - view.x[0]
    tall = 4.0 * float(np.abs(view.y).max()) + 0.1
    begin, low, high = [], [], []
    for (shape, sign), (a, c, fwhm) in zip(form, starts):
        more = [np.log(max(0.3 * fwhm, w))] * EXTRA[shape]
        begin += [a, c, np.log(fwhm / FWHM_PER_SIGMA), *more]
        low += [0.0 if sign > 0 else -tall, view.x[0], np.log(0.5 * w), *([np.log(0.1 * w)] * len(more))]
        high += [1.0 if sign > 0 else 0.0, view.x[-1], np.log(span), *([np.log(span)] * len(more))]
    for a, c, s in narrow:
        begin += [a, c, s]
        low += [-tall if a < 0 else 0.0, c - 0.7 * view.width, np.log(NARROWEST * w)]
        high += [tall if a > 0 else 0.0, c + 0.7 * view.width, np.log(NARROW * w)]
    return np.array(begin), np.array(low), np.array(high)


def with_narrow(view: View, fit: Compound, seeds) -> Compound:
    """The fit with other lines on it: those of ``seeds`` (m, 3) that hold, then one after
    another where the residual is largest and sharp, while the criterion falls."""
    size = max(1, int(round(0.6 * view.width / np.median(np.diff(view.x)))))
    size += 1 - size % 2
    fit = _seeded(view, fit, seeds)
    lit = NARROW * view.width < LIT * narrowest(fit)
    for _ in range(MOST_NARROW):
        rest = view.y - _flat(view, fit)
        tame = running_mean(rest, size)
        wide = 2 * int(2.0 * view.width / np.median(np.diff(view.x))) + 1
        local = tame - _level(tame, wide)
        sigma = view.noise * np.sqrt(view.length / size)
        least = np.maximum(FAR * sigma, LOCAL * _swing(fit.broad(view.x), wide))
        least = np.where(local > 0, least, least / LIT if lit else np.inf)
        k = int(np.argmax(np.abs(local) / least))
        near = np.abs(fit.narrow[:, 1] - view.x[k]) < 0.6 * view.width
        if np.abs(local[k]) < least[k] or near.any():
            return fit
        line = np.array([[local[k], view.x[k], np.log(0.8 * view.width / FWHM_PER_SIGMA)]])
        new = _again(view, fit, np.concatenate([fit.narrow, line]))
        misfit = max(1.0, new.chi2 / max(len(view.x) - new.count, 1))
        worse = new.criterion(view, misfit) > fit.criterion(view, misfit)
        if worse or not _narrow(view, new.narrow[-1:])[0]:
            return fit
        fit = new
    return fit


def _again(view: View, fit: Compound, narrow) -> Compound:
    starts = [(p[0], p[1], FWHM_PER_SIGMA * np.exp(p[2])) for p in fit.parts]
    return fit_compound(view, fit.form, starts, narrow)


def _narrow(view: View, narrow) -> np.ndarray:
    """True for lines that are not as wide as they may be; (m,)."""
    return np.exp(narrow[:, 2]) < 0.99 * NARROW * view.width / FWHM_PER_SIGMA


def _seeded(view: View, fit: Compound, seeds) -> Compound:
    """The fit with the seeds that stay narrow and sure."""
    seeds = seeds[np.argsort(-np.abs(seeds[:, 0]), kind="stable")][:SEEDS]
    if not len(seeds):
        return fit
    new = _again(view, fit, seeds)
    error = np.sqrt(np.maximum(np.diag(covariance(view, new)), 0.0))[-3 * len(seeds) :: 3]
    keep = _narrow(view, new.narrow) & (np.abs(new.narrow[:, 0]) > 3.0 * error)
    return new if keep.all() else _again(view, fit, new.narrow[keep])


def narrowest(fit: Compound) -> float:
    """FWHM of the narrowest part, Angstrom."""
    return float(min(width_and_area(s, p)[0] for (s, _), p in zip(fit.form, fit.parts)))


def _swing(curve, size: int):
    """Largest |curve| within ``size`` samples about each one."""
    return -running_min(-np.abs(curve), min(size, 2 * (len(curve) // 4) + 1))


def _flat(view: View, fit: Compound):
    lines = sum((profile("gaussian", view.x, p)[0] for p in fit.narrow), np.zeros(len(view.x)))
    return fit.broad(view.x) + lines


def _level(values, size: int):
    """What is wider than ``size`` samples, up or down: mean of opening and closing."""
    size = min(size, 2 * (len(values) // 4) + 1)
    opened = -running_min(-running_min(values, size), size)
    closed = running_min(-running_min(-values, size), size)
    return 0.5 * (opened + closed)


def covariance(view: View, fit: Compound) -> np.ndarray:
    """Of all parameters, for correlated noise, misfit and a doubtful continuum (k, k).

    Where chi-square says that the form is not the line's, what it leaves takes the place of the
    noise, with its own correlation over the narrowest part (Newey & West 1987, Econometrica 55,
    703).
    """
    z = fit.slopes
    inverse = np.linalg.pinv(z.T @ z)
    free = max(len(view.x) - fit.count, 1)
    misfit = fit.chi2 / free
    rest = (view.y - _flat(view, fit)) / view.noise
    meat = _smeared(z, view.correlation)
    if misfit > 1.0 + 3.0 * np.sqrt(2.0 * view.length / free):
        lags = int(narrowest(fit) / float(np.median(np.diff(view.x))))
        lags = min(max(lags, 1), len(rest) // 4)
        own = np.array([np.mean(rest[: len(rest) - k] * rest[k:]) for k in range(lags)])
        taper = 1.0 - np.arange(lags) / lags
        meat = np.maximum(misfit, 1.0) * _smeared(z, taper * own / own[0])
    moved = inverse @ (z.T @ ((1 - view.y) / view.noise)) * view.level
    return inverse @ meat @ inverse + np.outer(moved, moved)


def _smeared(z, correlation) -> np.ndarray:
    """z' R z of the slopes z (n, k) for noise of a correlation."""
    smeared = z.copy()
    for lag, r in enumerate(correlation[1:], 1):
        smeared[lag:] += r * z[:-lag]
        smeared[:-lag] += r * z[lag:]
    return z.T @ smeared


def numbers(shape: str, p, block):
    """(depth, error, centre, error, FWHM, error, area, error) of one part, Angstrom."""
    fwhm, area = width_and_area(shape, p)
    wider, more = np.zeros(len(p)), np.zeros(len(p))
    more[0] = area
    for i in range(2, len(p)):
        up = p.copy()
        up[i] += 1e-4
        w, a = width_and_area(shape, up)
        wider[i], more[i] = (w - fwhm) / 1e-4, p[0] * (a - area) / 1e-4
    error = np.sqrt(np.maximum(np.diag(block), 0.0))
    return (p[0], error[0], p[1], error[1], fwhm, np.sqrt(max(wider @ block @ wider, 0.0)),
            p[0] * area, np.sqrt(max(more @ block @ more, 0.0)))
