"""What a measurement is asked for, and what it answers with."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from .features import FeatureTable


@dataclass(frozen=True)
class MeasureOptions:
    """Choices of one measurement.

    resolution: resolving power; None measures the line width in the spectrum
    threshold: least matched-filter signal-to-noise of a feature; None takes the value at
        which one false feature is expected in the whole spectrum
    ranges: vacuum Angstrom ranges to search; empty searches everything
    continuum: method of the pseudo-continuum: levels, quantile, clipped or asymmetric
    """

    resolution: float | None = None
    threshold: float | None = None
    ranges: tuple[tuple[float, float], ...] = ()
    continuum: str = "levels"


@dataclass(frozen=True, eq=False)
class SegmentMeasure:
    """Continuum, noise and line width of one segment as nodes for linear interpolation.

    node_wave, node_flux, node_err: continuum nodes (vacuum Angstrom, flux units, one
        sigma of the continuum as a fraction of it), shape (k,)
    noise_wave, noise: one sigma of a sample relative to the continuum, shape (m,)
    correlation: autocorrelation of the noise at lags 0, 1, ... samples (1 first)
    width_wave, width: FWHM of the narrowest lines, Angstrom, shape (j,)
    width_pixels: the same in samples, shape (j,)
    width_law: how the measured width runs with wavelength, in words; '' where not measured
    width_err: one sigma of the measured width as a fraction of it
    """

    node_wave: np.ndarray
    node_flux: np.ndarray
    node_err: np.ndarray
    noise_wave: np.ndarray
    noise: np.ndarray
    correlation: np.ndarray
    width_wave: np.ndarray
    width: np.ndarray
    width_pixels: np.ndarray
    width_law: str = ""
    width_err: float = float("nan")

    def continuum_at(self, wave):
        """Pseudo-continuum in flux units at vacuum wavelength(s), Angstrom."""
        return np.interp(wave, self.node_wave, self.node_flux)

    def continuum_err_at(self, wave):
        """One sigma of the continuum as a fraction of it."""
        return np.interp(wave, self.node_wave, self.node_err)

    def noise_at(self, wave):
        """One sigma of a sample relative to the continuum."""
        return np.interp(wave, self.noise_wave, self.noise)

    def width_at(self, wave):
        """FWHM of the narrowest lines in Angstrom."""
        return np.interp(wave, self.width_wave, self.width)

    def resolution_at(self, wave):
        """Resolving power that the narrowest lines allow (a lower limit)."""
        return np.asarray(wave, dtype=float) / self.width_at(wave)

    @property
    def correlation_length(self) -> float:
        """Samples that share one independent noise value: sum of the autocorrelation."""
        return float(1.0 + 2.0 * np.sum(self.correlation[1:]))


@dataclass(frozen=True, eq=False)
class Measurement:
    """Everything measured in one spectrum.

    features: the table; segments: continuum, noise and width of each segment
    threshold: least significance used; trials: independent trials it counts
    expected_false: false features expected at that threshold
    coverage: vacuum Angstrom ranges actually searched, ascending
    """

    features: FeatureTable
    segments: tuple[SegmentMeasure, ...]
    threshold: float
    trials: float
    expected_false: float
    coverage: tuple[tuple[float, float], ...]
    warnings: tuple[str, ...] = field(default_factory=tuple)
