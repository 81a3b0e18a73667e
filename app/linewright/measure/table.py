"""Fitted parameters as rows of a FeatureTable."""

from __future__ import annotations

import numpy as np

from .features import FeatureTable
from .gauss import FWHM_PER_SIGMA, GAUSSIAN_AREA


def fitted_table(ready, found, fitted, segment: int) -> FeatureTable:
    """FeatureTable of fitted features, depths against the continuum under the veil."""
    own, sign, significance = found.own, found.sign, found.significance
    p, e = fitted.params, fitted.errors
    m = len(p)
    base = np.interp(p[:, 1], ready.trace.wave, ready.trace.veil)
    base = np.where(own, 0.0, np.minimum(base, 0.98))
    p, e = p.copy(), e.copy()
    p[:, 0] /= 1.0 - base
    e[:, [0, 3]] /= (1.0 - base)[:, None]
    fwhm = FWHM_PER_SIGMA * np.exp(p[:, 2])
    counts = np.bincount(fitted.group, minlength=1) if m else np.zeros(1, dtype=int)
    blend = counts[fitted.group] > 1 if m else np.zeros(0, dtype=bool)
    first = np.r_[True, np.diff(fitted.group) != 0] if m else np.zeros(0, dtype=bool)
    start = np.maximum.accumulate(np.where(first, np.arange(m), 0)) if m else np.zeros(0, int)
    component = np.where(blend, np.arange(m) - start + 1, 0)
    flags = [
        " ".join(w for w, on in (("blend", b), ("fallback", f), ("wing", w)) if on)
        for b, f, w in zip(blend, fitted.trouble, np.abs(base) > 0.02)
    ]
    return FeatureTable(
        number=np.arange(1, m + 1), segment=np.full(m, segment), component=component,
        sign=sign, wave=p[:, 1], wave_err=e[:, 1], significance=significance,
        depth=p[:, 0], depth_err=e[:, 0], fwhm=fwhm, fwhm_err=e[:, 2],
        ew=1e3 * GAUSSIAN_AREA * p[:, 0] * fwhm, ew_err=1e3 * e[:, 3],
        continuum=np.interp(p[:, 1], ready.trace.wave, ready.flux_level) * (1.0 - base),
        flags=tuple(flags),
    )


