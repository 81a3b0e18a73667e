"""A quick look that finds most long spectra in order, so that nothing need be repaired.

Blocks are small enough to stay in the processor's cache: memory is passed over once.
"""

from __future__ import annotations

import numpy as np

from .uncertainty import PLACEHOLDER, usual

BLOCK = 1 << 15


def spotless(wave: np.ndarray, flux: np.ndarray, sigma, mask) -> bool:
    """True when wavelengths are finite, positive and strictly ascending, fluxes finite and
    never exactly zero, errors finite, positive and no placeholders, and nothing is masked.

    All shape (n,); sigma and mask may be None. False only means that a closer look is due.
    """
    if len(wave) < 2 or (mask is not None and np.any(mask)):
        return False
    limit = PLACEHOLDER * usual(sigma, np.zeros(len(sigma), bool)) if sigma is not None else 0.0
    last = 0.0
    for start in range(0, len(wave), BLOCK):
        part = slice(start, start + BLOCK)
        w, f = wave[part], flux[part]
        if not (w[0] > last and w[-1] < np.inf and (w[1:] > w[:-1]).all()):
            return False
        if np.count_nonzero(f) < len(f) or not np.isfinite(f).all():
            return False
        if sigma is not None and not (sigma[part].min() > 0 and sigma[part].max() <= limit < np.inf):
            return False
        last = w[-1]
    return True
