"""Features fitted in groups: neighbours that overlap together, the others subtracted.

Features closer than about one width and a third are fitted as one sum of Gaussians; the
rest of the spectrum is held at its present model and subtracted from the window. Three
sweeps let groups see one another.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .gauss import (
    FWHM_PER_SIGMA, Fit, Windows, first_order_bias, fit_windows, lone_sensitivity, profiles,
    spread_noise,
)
from .veil import REACH as VEIL_REACH

REACH = 1.3  # widths on either side of a window's outer members
CLOSE = 1.8  # features nearer than this many mean widths share a fit
NARROWEST = 0.25  # line widths: interstellar lines of a rotating star
BROAD = 2.5  # line widths beyond which only the core of a feature is fitted
CORE = 0.35  # widths on either side of a core, at least one line width
MOST = 6  # members of a group
SWEEPS = 3
LONGEST = 1500  # samples of a window


@dataclass(frozen=True, eq=False)
class Trace:
    """One segment ready for fitting: vacuum wave, y = 1 - flux/continuum, noise of y,
    usable samples, line width in Angstrom, relative continuum error and veil (broad
    absorption, negative in emission), each (n,), and the noise's autocorrelation."""

    wave: np.ndarray
    y: np.ndarray
    noise: np.ndarray
    good: np.ndarray
    width: np.ndarray
    level_err: np.ndarray
    correlation: np.ndarray
    veil: np.ndarray


@dataclass(frozen=True, eq=False)
class Fitted:
    """Per feature: params (m, 3) a, c, ln s; errors (m, 4) of a, c, FWHM (Angstrom),
    area (Angstrom); group (m,) number; trouble (m,) True where the fit failed or sits on
    a bound; misfit (m,) reduced chi-square of the window; bias (m, 3) of a, FWHM, area, to
    be taken off."""

    params: np.ndarray
    errors: np.ndarray
    group: np.ndarray
    trouble: np.ndarray
    misfit: np.ndarray
    bias: np.ndarray

    def take(self, which) -> Fitted:
        return Fitted(*(getattr(self, n)[which] for n in self.__dataclass_fields__))


def group_features(centre, fwhm, run, alone) -> np.ndarray:
    """Group number of each feature (sorted by wavelength), shape (m,).

    centre, fwhm: Angstrom; run: stretch of each; alone: True for broad sources, whose
    core is fitted by itself. Groups longer than MOST are cut
    at their widest separations.
    """
    m = len(centre)
    if m == 0:
        return np.zeros(0, dtype=int)
    apart = np.diff(centre) / (0.5 * (fwhm[1:] + fwhm[:-1]))
    cut = (apart > CLOSE) | (np.diff(run) != 0) | alone[1:] | alone[:-1]
    edges = np.r_[0, np.flatnonzero(cut) + 1, m]
    stack = [(a, b) for a, b in zip(edges[:-1], edges[1:])]
    group, number = np.zeros(m, dtype=int), 0
    while stack:
        a, b = stack.pop()
        if b - a > MOST:
            middle = apart[a : b - 1] + 0.0
            middle[0] *= 0.5
            middle[-1] *= 0.5
            split = a + 1 + int(np.argmax(middle))
            stack += [(split, b), (a, split)]
            continue
        group[a:b] = number
        number += 1
    return group


def _windows(trace: Trace, first, last, rest):
    """Windows (padded) of the samples from ``first`` to ``last`` (exclusive), (g,);
    rest (n,) is subtracted."""
    p = int((last - first).max())
    index = first[:, None] + np.arange(p)[None, :]
    inside = index < last[:, None]
    index = np.minimum(index, len(trace.wave) - 1)
    inside &= trace.good[index]
    weight = np.where(inside, 1.0 / trace.noise[index], 0.0)
    y = np.where(inside, trace.y[index] - rest[index], 0.0)
    return index, Windows(trace.wave[index], y, weight)


def component_sum(wave, params, reach: float = 5.0) -> np.ndarray:
    """Sum of all components on the samples ``wave`` (n,), each out to ``reach`` sigma."""
    total = np.zeros(len(wave))
    sigma = np.exp(params[:, 2])
    first = np.searchsorted(wave, params[:, 1] - reach * sigma)
    last = np.searchsorted(wave, params[:, 1] + reach * sigma)
    size = np.maximum(last - first, 0)
    for members in _buckets(size):
        p = int(size[members].max(initial=0))
        if p == 0:
            continue
        index = first[members, None] + np.arange(p)[None, :]
        inside = index < last[members, None]
        index = np.minimum(index, len(wave) - 1)
        u = (wave[index] - params[members, 1:2]) / sigma[members, None]
        part = np.where(inside, params[members, 0:1] * np.exp(-0.5 * u * u), 0.0)
        total += np.bincount(index.ravel(), part.ravel(), minlength=len(wave))
    return total


def _buckets(size, most: int = 400_000):
    """Indices of like sizes (within a factor 1.5), at most ``most`` samples each."""
    order = np.argsort(size, kind="stable")
    start = 0
    while start < len(order):
        limit = max(1.5 * size[order[start]], size[order[start]] + 8)
        stop = start + int(np.searchsorted(size[order[start:]], limit, side="right"))
        stop = min(stop, start + max(1, int(most // max(limit, 1))))
        yield order[start:stop]
        start = stop


def fit_features(trace: Trace, start, run_limits, group, own, tick=lambda: None) -> Fitted:
    """Fit all features of a segment.

    start: (m, 3) a, c, ln s sorted by c; run_limits: (m, 2) first and last+1 sample of
    the stretch each lies in; group: (m,) from ``group_features``; own: (m,) True for the
    source of a veil, measured against the bare continuum with the rest of its group; tick:
    called now and then.
    """
    params = start.copy()
    m = len(params)
    errors, misfit, bias = np.full((m, 4), np.nan), np.full(m, np.nan), np.zeros((m, 3))
    trouble = np.zeros(m, dtype=bool)
    if m == 0:
        return Fitted(params, errors, group, trouble, misfit, bias)
    members_of = np.split(np.arange(m), np.flatnonzero(np.diff(group)) + 1)
    sizes = np.array([len(x) for x in members_of])
    alike = [np.array([x for x in members_of if len(x) == n]) for n in np.unique(sizes)]
    for sweep in range(SWEEPS):
        bare, base = backgrounds(trace, params, own)
        fresh = params.copy()
        for rows in alike:
            first, last = _reach(trace, params, rows, run_limits, own)
            for part in _buckets(last - first):
                one = _Batch(trace, rows[part], first[part], last[part], start)
                fit, windows = one.fit(params, bare, base, own[rows[part]].any(axis=1))
                fresh[rows[part]] = fit.params
                tick()
                if sweep == SWEEPS - 1:
                    one.finish(fit, windows, errors, misfit, trouble)
                    bias[rows[part]] = first_order_bias(windows, fit)
        params = fresh
    return Fitted(params, errors, group, trouble, misfit, bias)


def backgrounds(trace, params, own):
    """(all components, all components with the veil under the narrow ones), each (n,)."""
    narrow = component_sum(trace.wave, params[~own])
    source = component_sum(trace.wave, params[own])
    # the veil follows the wings of what is wider than its reach; a Gaussian fitted to the
    # core alone says nothing of them
    broad = own & _broader(trace, params, VEIL_REACH)
    core = component_sum(trace.wave, params[own & ~broad])
    core += component_sum(trace.wave, params[broad], CORE * FWHM_PER_SIGMA)
    veiled = np.where(trace.veil >= 0, np.maximum(trace.veil, core),
                      np.minimum(trace.veil, core))
    return narrow + source, narrow + veiled


def _broader(trace, params, widths: float):
    """True for components wider than ``widths`` line widths, (m,)."""
    at = np.minimum(np.searchsorted(trace.wave, params[:, 1]), len(trace.wave) - 1)
    return FWHM_PER_SIGMA * np.exp(params[:, 2]) > widths * trace.width[at]


def _reach(trace, params, rows, limits, own):
    """First and last+1 sample of each group's window; only the core of broad sources."""
    fwhm = FWHM_PER_SIGMA * np.exp(params[:, 2])
    at = np.minimum(np.searchsorted(trace.wave, params[:, 1]), len(trace.wave) - 1)
    broad = own & _broader(trace, params, BROAD)
    core = np.maximum(CORE * fwhm, trace.width[at])
    half = np.where(broad, core, REACH * fwhm)
    low = (params[:, 1] - half)[rows].min(axis=1)
    high = (params[:, 1] + half)[rows].max(axis=1)
    first = np.maximum(np.searchsorted(trace.wave, low), limits[rows[:, 0], 0])
    last = np.minimum(np.searchsorted(trace.wave, high) + 1, limits[rows[:, 0], 1])
    return first, np.clip(last, first + 4, first + LONGEST)


@dataclass
class _Batch:
    """Groups of one size and like window lengths."""

    trace: Trace
    rows: np.ndarray
    first: np.ndarray
    last: np.ndarray
    start: np.ndarray

    def fit(self, params, bare, base, with_source) -> tuple[Fit, Windows]:
        index, plain = _windows(self.trace, self.first, self.last, bare)
        _, veiled = _windows(self.trace, self.first, self.last, base)
        own = params[self.rows]
        mine, _ = profiles(plain.x, own)
        y = np.where(with_source[:, None], plain.y, veiled.y) + mine
        windows = Windows(plain.x, np.where(plain.weight > 0, y, 0.0), plain.weight)
        low, high = self.bounds()
        return fit_windows(windows, own, low, high), windows

    def bounds(self):
        begin = self.start[self.rows]
        width = np.exp(begin[..., 2]) * FWHM_PER_SIGMA
        narrow = self.trace.width[np.searchsorted(self.trace.wave, begin[..., 1]) - 1]
        low, high = begin.copy(), begin.copy()
        sign = np.sign(begin[..., 0])
        big = 3.0 * np.abs(begin[..., 0]) + 0.05
        low[..., 0] = np.where(sign > 0, 0.0, -big)
        high[..., 0] = np.where(sign > 0, big, 0.0)
        low[..., 1] -= 0.5 * width
        high[..., 1] += 0.5 * width
        low[..., 2] = np.log(np.minimum(NARROWEST * narrow, 0.8 * width) / FWHM_PER_SIGMA)
        high[..., 2] = np.log(np.maximum(1.8 * width, 1.6 * narrow) / FWHM_PER_SIGMA)
        return low, high

    def finish(self, fit, windows, errors, misfit, trouble):
        at = np.minimum(np.searchsorted(self.trace.wave, fit.params[:, 0, 1]),
                        len(self.trace.wave) - 1)
        cov = spread_noise(windows, fit, self.trace.correlation)
        with_level = spread_noise(windows, fit, self.trace.correlation,
                                  self.trace.level_err[at])
        extra = with_level - cov
        scale, reduced = self.misfit_scale(fit, windows)
        cov = cov * scale[:, None, None] + extra
        low, high = self.bounds()
        edge = (np.abs(fit.params - low) < 1e-9) | (np.abs(fit.params - high) < 1e-9)
        for j in range(self.rows.shape[1]):
            errors[self.rows[:, j]] = lone_sensitivity(cov, fit.params, j)
            misfit[self.rows[:, j]] = reduced
            trouble[self.rows[:, j]] = edge[:, j].any(axis=1) | ~fit.converged

    def misfit_scale(self, fit, windows):
        """Variance scale (1 where the model fits) and reduced chi-square, each (g,).

        Errors grow only where chi-square says, beyond three of its own sigmas, that
        the shape is not a sum of Gaussians.
        """
        used = (windows.weight > 0).sum(axis=1)
        length = 1.0 + 2.0 * self.trace.correlation[1:].sum()
        free = np.maximum(used / length - 3.0 * self.rows.shape[1], 1.0)
        reduced = fit.chi2 / np.maximum(free * length, 1.0)
        significant = reduced > 1.0 + 3.0 * np.sqrt(2.0 / free)
        return np.where(significant, reduced, 1.0), reduced
