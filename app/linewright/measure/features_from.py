"""Feature tables from columns that someone else measured."""

from __future__ import annotations

import numpy as np

from ..errors import InputRefused
from .features import FeatureTable

GAUSSIAN_AREA = 0.5 * np.sqrt(np.pi / np.log(2.0))  # area / (height * FWHM) = 1.0644670194
KINDS = {"absorption": 1, "emission": -1, "": 1}


def _column(values, n: int, name: str) -> np.ndarray:
    if values is None:
        return np.full(n, np.nan)
    column = np.broadcast_to(np.asarray(values, dtype=float), (n,)).copy()
    if name == "wave_err" and np.any(column <= 0):
        raise InputRefused(
            "feature table", "wave_err holds zero or negative values",
            "give positive one-sigma errors in Angstrom or leave the column out",
        )
    return column


def _signs(kind, depth: np.ndarray) -> np.ndarray:
    if kind is None:
        return np.where(depth < 0, -1, 1)
    kinds = np.broadcast_to(np.asarray(kind), depth.shape)
    if kinds.dtype.kind in "if":
        return np.where(kinds < 0, -1, 1)
    words = [str(k).strip().lower() for k in kinds]
    unknown = sorted(set(words) - set(KINDS))
    if unknown:
        raise InputRefused(
            "feature table", f"kind '{unknown[0]}' is not known", "write absorption or emission"
        )
    return np.array([KINDS[w] for w in words], dtype=int)


def features_from_columns(
    wave_vac, wave_err=None, depth=None, fwhm=None, kind=None, **extra
) -> FeatureTable:
    """A FeatureTable of n features sorted by wavelength.

    wave_vac: vacuum Angstrom, shape (n,); the other columns are arrays or one number.
    depth is positive in absorption, negative in emission; kind: 'absorption' or
    'emission' words (or +1, -1); where kind says emission, depth takes its sign.
    extra: significance, depth_err, fwhm_err, ew, ew_err (milliangstrom), continuum,
    segment. The equivalent width follows from depth and FWHM as a Gaussian's where
    it is not given. Raises InputRefused on an empty or non-finite wave column.
    """
    wave = np.atleast_1d(np.asarray(wave_vac, dtype=float))
    if wave.ndim != 1 or not len(wave) or not np.all(np.isfinite(wave)) or np.any(wave <= 0):
        raise InputRefused(
            "feature table", "the wave column is empty or holds values that are no wavelength",
            "give one positive wavelength in Angstrom per feature",
        )
    n = len(wave)
    depth = _column(depth, n, "depth")
    sign = _signs(kind, depth)
    depth = np.abs(depth) * sign
    fwhm = _column(fwhm, n, "fwhm")
    ew = _column(extra.pop("ew", None), n, "ew")
    ew = np.where(np.isfinite(ew), np.abs(ew) * sign, 1e3 * GAUSSIAN_AREA * depth * fwhm)
    segment = np.broadcast_to(extra.pop("segment", 0), (n,)).astype(int)
    names = ("significance", "depth_err", "fwhm_err", "ew_err", "continuum")
    rest = {name: _column(extra.pop(name, None), n, name) for name in names}
    if extra:
        raise TypeError(f"unknown column {sorted(extra)[0]!r}")
    order = np.lexsort((wave, segment))
    columns = dict(
        segment=segment, component=np.zeros(n, dtype=int), sign=sign, wave=wave,
        wave_err=_column(wave_err, n, "wave_err"), depth=depth, fwhm=fwhm, ew=ew, **rest,
    )
    return FeatureTable(
        number=np.arange(1, n + 1),
        flags=("",) * n,
        **{name: np.array(column)[order] for name, column in columns.items()},
    )
