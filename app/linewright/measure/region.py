"""A stretch of a spectrum fitted by hand: any profile, any number of components.

Split, merge, drag the limits, choose the profile: all are one fit with other centres,
limits or profile. The number of components and the profile are chosen by the Bayesian
information criterion (Schwarz 1978), BIC = chi2 + k ln n with n independent samples.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..errors import InputRefused
from .by_hand import local_trace, segment_at
from .features import FeatureTable
from .gauss import FWHM_PER_SIGMA
from .shapes import EXTRA, profile, width_and_area


@dataclass(frozen=True, eq=False)
class RegionFit:
    """features: one row a component, flagged 'hand' and by the profile; profile: its name;
    bic, chi2; wave (n,) and flux (n,) of the fitted model; params (components, k)."""

    features: FeatureTable
    profile: str
    bic: float
    chi2: float
    wave: np.ndarray
    flux: np.ndarray
    params: np.ndarray


def fit_region(spectrum, measurement, limits, centres, shape: str = "gaussian") -> RegionFit:
    """Components at ``centres`` fitted together between ``limits``.

    limits: (low, high) vacuum Angstrom; centres: vacuum Angstrom inside them; shape:
    gaussian, voigt, rotational or core-wings. Raises InputRefused on an unknown shape,
    centres outside, or too few samples for the parameters.
    """
    low, high = sorted(limits)
    number = segment_at(spectrum, measurement, 0.5 * (low + high))
    nodes = measurement.segments[number]
    trace = local_trace(spectrum.segments[number], nodes, 0.5 * (low + high), 0.5 * (high - low))
    fit = fit_trace(trace, nodes, (low, high), centres, shape)
    segment = np.full(len(fit.features), number)
    return replace(fit, features=replace(fit.features, segment=segment))


def fit_trace(trace, nodes, limits, centres, shape: str = "gaussian", signs=None) -> RegionFit:
    """As ``fit_region``, in a Trace that is at hand; nodes: its SegmentMeasure.

    signs: +1 absorption or -1 emission for each centre, to which its component is held; None
    leaves them free. The rows' segment is 0.
    """
    if shape not in EXTRA:
        raise InputRefused(f"profile '{shape}'", "is not known", f"choose {', '.join(EXTRA)}")
    low, high = sorted(limits)
    centres = np.atleast_1d(np.asarray(centres, dtype=float))
    order = np.argsort(centres)
    centres = centres[order]
    held = np.zeros(len(centres)) if signs is None else np.asarray(signs)[order]
    if not len(centres) or centres[0] < low or centres[-1] > high:
        raise InputRefused("region", "a component lies outside its limits", "widen the limits")
    used = np.flatnonzero(trace.good & (trace.wave >= low) & (trace.wave <= high))
    k = 3 + EXTRA[shape]
    if len(used) <= k * len(centres):
        raise InputRefused("region", f"{len(used)} samples for {k * len(centres)} parameters",
                           "widen the limits or take fewer components")
    return _Region(trace, nodes, used, centres, shape, held).fit()


def choose_region(spectrum, measurement, limits, choices) -> RegionFit:
    """The fit of least BIC among ``choices``, pairs (centres, shape)."""
    return min((fit_region(spectrum, measurement, limits, c, s) for c, s in choices),
               key=lambda fit: fit.bic)


@dataclass(frozen=True, eq=False)
class _Region:
    trace: object
    nodes: object
    used: np.ndarray
    centres: np.ndarray
    shape: str
    held: np.ndarray

    def start(self):
        t, m = self.trace, len(self.centres)
        at = self.used[np.clip(np.searchsorted(t.wave[self.used], self.centres), 0,
                               len(self.used) - 1)]
        span = float(np.ptp(t.wave[self.used]))
        width = np.minimum(t.width[at], span) / FWHM_PER_SIGMA
        deepest = t.y[at] + np.where(t.y[at] < 0, -1, 1) * 0.5 * t.noise[at]
        deepest = np.where(self.held * deepest < 0, self.held * t.noise[at], deepest)
        columns = [deepest, self.centres, np.log(width)]
        low = [np.where(self.held > 0, 0.0, -1e4), self.centres - 0.25 * span, np.log(0.3 * width)]
        high = [np.where(self.held < 0, 0.0, 1e4), self.centres + 0.25 * span, np.log(span + width)]
        if EXTRA[self.shape]:
            columns.append(np.log(np.full(m, 0.15 * span)))
            low.append(np.log(0.02 * width))
            high.append(np.log(np.full(m, 2.0 * span)))
        return tuple(np.stack(c, axis=1).ravel() for c in (columns, low, high))

    def model(self, x, flat):
        parts = [profile(self.shape, x, p) for p in flat.reshape(len(self.centres), -1)]
        return sum(v for v, _ in parts), np.hstack([d for _, d in parts])

    def fit(self) -> RegionFit:
        from scipy.optimize import least_squares

        t, u = self.trace, self.used
        start, low, high = self.start()
        weight = 1.0 / t.noise[u]
        done = least_squares(
            lambda p: (self.model(t.wave[u], p)[0] - t.y[u]) * weight, start,
            jac=lambda p: self.model(t.wave[u], p)[1] * weight[:, None],
            bounds=(low, high), x_scale="jac", max_nfev=200,
        )
        chi2, length = 2.0 * float(done.cost), self.nodes.correlation_length
        bic = chi2 / length + len(start) * np.log(len(u) / length)
        at_bound = (done.active_mask != 0).any() or not done.success
        errors = self.covariance(done, weight, max(1.0, chi2 / (len(u) - len(start))))
        wave = t.wave[u]
        flux = self.nodes.continuum_at(wave) * (1.0 - self.model(wave, done.x)[0])
        table = self.table(done.x, errors, "fallback " if at_bound else "")
        params = done.x.reshape(len(self.centres), -1)
        return RegionFit(table, self.shape, float(bic), chi2, wave, flux, params)

    def covariance(self, done, weight, misfit: float):
        """Of the parameters, for correlated noise (as gauss.spread_noise) and a doubtful
        continuum; larger by the misfit where the shape does not fit."""
        z = done.jac
        inverse = np.linalg.pinv(z.T @ z)
        smeared = z.copy()
        for lag, r in enumerate(self.trace.correlation[1:], 1):
            smeared[lag:] += r * z[:-lag]
            smeared[:-lag] += r * z[lag:]
        t, u = self.trace, self.used
        moved = inverse @ (z.T @ ((1 - t.y[u]) * weight)) * t.level_err[u].mean()
        return inverse @ (z.T @ smeared) @ inverse * misfit + np.outer(moved, moved)

    def table(self, flat, covariance, trouble: str) -> FeatureTable:
        params = flat.reshape(len(self.centres), -1)
        params = params[np.argsort(params[:, 1])] if len(params) == 1 else params
        m, k = params.shape
        rows = [self._numbers(p, covariance[i * k : i * k + k, i * k : i * k + k])
                for i, p in enumerate(params)]
        depth, depth_err, wave_err, fwhm, fwhm_err, ew, ew_err = np.array(rows).T
        noise = np.interp(params[:, 1], self.trace.wave, self.trace.noise)
        step = np.interp(params[:, 1], self.trace.wave, np.gradient(self.trace.wave))
        strength = np.abs(depth) / noise * np.sqrt(0.7527 * fwhm / step)
        word = "" if self.shape == "gaussian" else f"{self.shape} "
        table = FeatureTable(
            number=np.arange(1, m + 1), segment=np.zeros(m, dtype=int),
            component=np.zeros(m, dtype=int) if m == 1 else np.arange(1, m + 1),
            sign=np.where(depth < 0, -1, 1), wave=params[:, 1], wave_err=wave_err,
            significance=strength / np.sqrt(self.nodes.correlation_length), depth=depth,
            depth_err=depth_err, fwhm=fwhm, fwhm_err=fwhm_err, ew=ew, ew_err=ew_err,
            continuum=self.nodes.continuum_at(params[:, 1]),
            flags=(f"{'blend ' if m > 1 else ''}{trouble}{word}hand",) * m,
        )
        return table.take(np.argsort(table.wave))

    def _numbers(self, p, block):
        """depth, its error, centre's error, FWHM and EW (milliangstrom) with errors."""
        fwhm, area = width_and_area(self.shape, p)
        grad_w, grad_e = np.zeros(len(p)), np.zeros(len(p))
        grad_e[0] = area
        for i in range(2, len(p)):
            up = p.copy()
            up[i] += 1e-4
            wide, more = width_and_area(self.shape, up)
            grad_w[i], grad_e[i] = (wide - fwhm) / 1e-4, p[0] * (more - area) / 1e-4
        error = np.sqrt(np.maximum(np.diag(block), 0.0))
        return (p[0], error[0], error[1], fwhm, np.sqrt(max(grad_w @ block @ grad_w, 0.0)),
                1e3 * p[0] * area, 1e3 * np.sqrt(max(grad_e @ block @ grad_e, 0.0)))
