"""One sigma and a bad-sample mask out of errors, inverse variances and quality flags."""

from __future__ import annotations

import numpy as np

PLACEHOLDER = 1e4  # an uncertainty this many times the median marks a bad sample


def sigma_from_ivar(ivar) -> np.ndarray:
    """1/sqrt(ivar); NaN where the inverse variance is not positive."""
    ivar = np.asarray(ivar, dtype=float)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(ivar > 0, 1.0 / np.sqrt(ivar), np.nan)


def bad_uncertainty(sigma: np.ndarray, flux: np.ndarray) -> np.ndarray:
    """True where sigma is not finite, not positive, or a huge placeholder.

    A placeholder exceeds both PLACEHOLDER times the median sigma and a hundred times the
    flux, so that an honest error of a very bright stretch is kept.
    """
    with np.errstate(invalid="ignore"):
        bad = ~np.isfinite(sigma)
        bad |= sigma <= 0
        if not bad.all():
            huge = np.flatnonzero(sigma > PLACEHOLDER * usual(sigma, bad))
            bad[huge[(sigma[huge] > 100 * np.abs(flux[huge]))]] = True
    return bad


def usual(sigma: np.ndarray, bad: np.ndarray) -> float:
    """Median of the good ones (``bad`` False); of long arrays a regular sample does."""
    step = max(1, len(sigma) // 200_000)
    sample = sigma[::step][~bad[::step]]
    if not len(sample):
        sample = sigma[~bad]
    return float(np.median(sample))


def mask_from_flags(flags, comment: str, asked: bool) -> tuple[np.ndarray | None, str]:
    """(mask or None, warning) from a flag column.

    Zero/one flags are used (one = bad, unless the comment says '1=good'). Bits of
    unstated meaning, or flags on most samples, are reported and not used unless asked for.
    """
    flags = np.nan_to_num(np.asarray(flags, dtype=float))
    good_is_one = "1=good" in comment.lower().replace(" ", "")
    bad = flags == 0 if good_is_one else flags != 0
    count = int(bad.sum())
    if asked or count == 0:
        return bad, ""
    if good_is_one or set(np.unique(flags)) <= {0.0, 1.0}:
        if 2 * count <= len(bad):
            return bad, ""
        return None, f"flags mark {count} of {len(bad)} samples bad: not used"
    return None, (f"quality bits of unstated meaning on {count} of {len(bad)} samples: not used "
                  "(--columns mask=NAME uses them)")
