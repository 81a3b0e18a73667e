"""Fitted parameters as rows of a FeatureTable."""

from __future__ import annotations

import numpy as np

from .broad import integrate_broad
from .features import FeatureTable
from .gauss import FWHM_PER_SIGMA, GAUSSIAN_AREA

SATURATED = 0.9  # central depth beyond which a line is called saturated
WING = 0.02  # veil beyond which a feature is said to stand in a wing


def fitted_table(trace, nodes, found, fitted, segment: int) -> FeatureTable:
    """FeatureTable of fitted features.

    trace: Trace of the segment; nodes: its SegmentMeasure; found, fitted: what was found
    and fitted, m rows. Depths are relative to the continuum lowered by the veil.
    """
    m = len(fitted.params)
    base = np.interp(fitted.params[:, 1], trace.wave, trace.veil)
    base = np.where(found.own, 0.0, np.minimum(base, 0.98))
    bias = np.where(fitted.trouble[:, None], 0.0, fitted.bias)
    depth = (fitted.params[:, 0] - bias[:, 0]) / (1 - base)
    depth_err = fitted.errors[:, 0] / (1 - base)
    fwhm, fwhm_err = FWHM_PER_SIGMA * np.exp(fitted.params[:, 2]), fitted.errors[:, 2].copy()
    area = GAUSSIAN_AREA * fitted.params[:, 0] * fwhm - bias[:, 2]
    fwhm -= bias[:, 1]
    ew, ew_err = 1e3 * area / (1 - base), 1e3 * fitted.errors[:, 3] / (1 - base)
    wide = integrate_broad(trace, found, fitted)
    fwhm_err[wide.rows] *= wide.fwhm / fwhm[wide.rows]
    fwhm[wide.rows] = wide.fwhm
    ew[wide.rows], ew_err[wide.rows] = 1e3 * wide.area, 1e3 * wide.area_err
    void = fitted.params[:, 0] == 0  # a fit that ended at no line at all measures nothing else
    wave_err = np.where(void, np.nan, fitted.errors[:, 1])
    fwhm_err[void] = ew_err[void] = np.nan
    component = _components(fitted.group)
    marks = {
        "blend": component > 0,
        "integrated": np.isin(np.arange(m), wide.rows),
        "wing": np.abs(base) > WING,
        "saturated": depth > SATURATED,
        "edge": _at_edge(trace, fitted.params[:, 1], fwhm, found.limits),
        "fallback": fitted.trouble,
    }
    return FeatureTable(
        number=np.arange(1, m + 1), segment=np.full(m, segment), component=component,
        sign=found.sign, wave=fitted.params[:, 1], wave_err=wave_err,
        significance=found.significance, depth=depth, depth_err=depth_err, fwhm=fwhm,
        fwhm_err=fwhm_err, ew=ew, ew_err=ew_err,
        continuum=nodes.continuum_at(fitted.params[:, 1]) * (1.0 - base),
        flags=tuple(" ".join(w for w in marks if marks[w][i]) for i in range(m)),
    )


def spike_table(trace, nodes, spikes, segment: int) -> FeatureTable:
    """Rows, flagged 'spike', of hits that no line of the instrument's width could make.

    depth: the excess of the worst sample; fwhm: of the samples hit; ew: the excess as one
    sample's area. Nothing is fitted: a hit has no profile.
    """
    at, m = spikes.index, len(spikes.index)
    step, noise = np.gradient(trace.wave)[at], trace.noise[at]
    return FeatureTable(
        number=np.arange(1, m + 1), segment=np.full(m, segment),
        component=np.zeros(m, dtype=int), sign=np.where(spikes.excess > 0, 1, -1),
        wave=trace.wave[at], wave_err=step / np.sqrt(12.0), significance=spikes.significance,
        depth=spikes.excess, depth_err=noise, fwhm=step, fwhm_err=np.full(m, np.nan),
        ew=1e3 * spikes.excess * step, ew_err=1e3 * noise * step,
        continuum=nodes.continuum_at(trace.wave[at]), flags=("spike",) * m,
    )


def _components(group) -> np.ndarray:
    """0 for a lone feature, 1, 2, ... along a fitted blend, shape (m,)."""
    if not len(group):
        return np.zeros(0, dtype=int)
    first = np.r_[True, np.diff(group) != 0]
    start = np.maximum.accumulate(np.where(first, np.arange(len(group)), 0))
    together = np.bincount(group)[group] > 1
    return np.where(together, np.arange(len(group)) - start + 1, 0)


def _at_edge(trace, centre, fwhm, limits) -> np.ndarray:
    """True within one FWHM of an end of the stretch or with a hole that near."""
    low, high = trace.wave[limits[:, 0]], trace.wave[limits[:, 1] - 1]
    total = np.r_[0, np.cumsum(~trace.good)]
    a = np.searchsorted(trace.wave, centre - fwhm)
    b = np.searchsorted(trace.wave, centre + fwhm)
    return (centre - low < fwhm) | (high - centre < fwhm) | (total[b] > total[a])
