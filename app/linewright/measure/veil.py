"""What broad structure leaves under narrow lines: wings, bands, scattered haze.

A morphological opening (running minimum, then running maximum, over ``REACH`` line
widths) of the absorbed fraction keeps whatever is wider than the reach at its level: the
wings of H alpha or Na D, not the lines standing in them. Narrow features are measured
against the continuum lowered by this veil.
"""

from __future__ import annotations

import numpy as np

REACH = 16.0  # line widths
FIRM = 4.0  # sigmas of the smoothed samples below which there is no veil


def running_min(values: np.ndarray, size: int) -> np.ndarray:
    """Minimum over ``size`` (odd) samples about each one; ends use what is there."""
    half = size // 2
    out = np.r_[np.full(half, np.inf), values, np.full(half, np.inf)]
    done = 1
    while done < size:
        step = min(done, size - done)
        out = np.minimum(out[:-step], out[step:])
        done += step
    return out


def running_mean(values: np.ndarray, size: int) -> np.ndarray:
    """Mean over ``size`` (odd) samples about each one, ends held."""
    half = size // 2
    total = np.cumsum(np.r_[0.0, np.full(half, values[0]), values, np.full(half, values[-1])])
    return (total[size:] - total[:-size]) / size


def _odd(value: float) -> int:
    return 2 * int(value / 2) + 1


def veil(y, noise, fwhm, length: float) -> np.ndarray:
    """Broad absorption of one stretch: fraction of the continuum >= 0, shape (n,).

    y: (continuum - flux)/continuum (or its negative, for emission), shape (n,); noise:
    one sigma of y, (n,); fwhm: line width in samples, (n,); length: samples per
    independent noise value.
    """
    out = np.zeros(len(y))
    for span in _spans(fwhm):
        width = float(np.median(fwhm[span]))
        size, smooth = _odd(REACH * width), _odd(max(1.0, 0.6 * width))
        pad = 2 * size
        wide = slice(max(0, span.start - pad), min(len(y), span.stop + pad))
        tame = running_mean(y[wide], smooth)
        opened = -running_min(-running_min(tame, size), size)
        sigma = noise[wide] * min(1.0, np.sqrt(length / smooth))
        # the minimum of noise lies below its mean
        level = np.where(opened > FIRM * sigma, opened + 1.5 * sigma, 0.0)
        level = running_mean(level, _odd(0.25 * size))
        out[span] = np.minimum(level, np.maximum(tame, 0.0))[span.start - wide.start :][
            : span.stop - span.start
        ]
    return out


def _spans(fwhm):
    mark = np.floor(np.log(fwhm) / 0.2)
    edges = np.unique(np.r_[0, np.flatnonzero(np.diff(mark)) + 1, len(fwhm)])
    return [slice(int(a), int(b)) for a, b in zip(edges[:-1], edges[1:], strict=True)]


def owners(index, depth, under) -> np.ndarray:
    """True for features that own the veil above them, shape (m,).

    index: samples, ascending; depth: |y| there; under: the veil (n,). The strongest
    feature of the region where the veil stays above half of its value at the feature is
    its source, and is measured against the bare continuum.
    """
    own = np.zeros(len(index), dtype=bool)
    for k in np.argsort(-depth, kind="stable"):
        level = 0.5 * under[index[k]]
        if level <= 0:
            own[k] = True
            continue
        i = k
        strongest = True
        for step in (-1, 1):
            i = k + step
            while 0 <= i < len(index) and strongest:
                between = under[min(index[i], index[k]) : max(index[i], index[k]) + 1]
                if between.min() < level:
                    break
                strongest = depth[i] <= depth[k]
                i += step
        own[k] = strongest
    return own
