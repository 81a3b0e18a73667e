"""Measured features as one frozen table of columns."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np


@dataclass(frozen=True, eq=False)
class FeatureTable:
    """Features sorted by segment, then wavelength; arrays of equal length n.

    number: permanent id, starts at 1, never reused in a session
    segment: segment index; component: 0 for a lone feature, 1.. inside a fitted blend
    sign: +1 absorption, -1 emission
    wave, wave_err: vacuum Angstrom in the spectrum's frame
    significance: matched-filter signal-to-noise
    depth, depth_err: (continuum - flux)/continuum, negative in emission
    fwhm, fwhm_err: Angstrom; ew, ew_err: milliangstrom, negative in emission
    continuum: pseudo-continuum at the feature, flux units
    flags: short words joined by spaces ('blend', 'edge', 'saturated', 'fallback', 'hand')
    NaN stands for 'not measured' in every float column.
    """

    number: np.ndarray
    segment: np.ndarray
    component: np.ndarray
    sign: np.ndarray
    wave: np.ndarray
    wave_err: np.ndarray
    significance: np.ndarray
    depth: np.ndarray
    depth_err: np.ndarray
    fwhm: np.ndarray
    fwhm_err: np.ndarray
    ew: np.ndarray
    ew_err: np.ndarray
    continuum: np.ndarray
    flags: tuple[str, ...]

    def __len__(self) -> int:
        return len(self.wave)

    def take(self, which) -> FeatureTable:
        """Rows by boolean mask or integer index."""
        index = np.arange(len(self))[which]
        columns = {
            f.name: getattr(self, f.name)[index] for f in fields(self) if f.name != "flags"
        }
        return FeatureTable(**columns, flags=tuple(self.flags[i] for i in index))
