"""Optical depth of many lines on one logarithmic wavelength grid."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from linewright.spectra.medium import C_KM_S

FLOOR = 1e-4  # optical depth below which a line's wing is dropped
FARTHEST = 6000.0  # km/s, of any wing
BALMER_LIMIT = 3647.05  # vacuum Angstrom, 4/R_H


@dataclass(frozen=True, eq=False)
class Grid:
    """Vacuum wavelengths at a constant velocity step (km/s)."""

    start: float
    step: float
    count: int

    @classmethod
    def over(cls, low: float, high: float, step: float) -> Grid:
        return cls(low, step, int(np.log(high / low) * C_KM_S / step) + 2)

    @property
    def wave(self) -> np.ndarray:
        return self.start * np.exp(np.arange(self.count) * (self.step / C_KM_S))

    def position(self, wave) -> np.ndarray:
        """Fractional index of vacuum wavelengths."""
        return np.log(np.asarray(wave) / self.start) * (C_KM_S / self.step)


def relative_voigt(velocity, b, damping) -> np.ndarray:
    """Voigt function over its central value at a velocity offset, b in km/s."""
    from scipy.special import wofz

    return wofz(velocity / b + 1j * damping).real / wofz(1j * damping).real


def reach(depth, b, damping) -> np.ndarray:
    """km/s out to which a line's optical depth exceeds FLOOR."""
    ratio = np.maximum(depth / FLOOR, 1.0)
    core = b * np.sqrt(np.log(ratio)) + b
    wing = b * np.sqrt(ratio * damping / np.sqrt(np.pi))
    return np.minimum(np.maximum(core, wing), FARTHEST)


def optical_depth(grid: Grid, wave, depth, b, damping) -> np.ndarray:
    """Sum of Voigt profiles with central optical depths ``depth``, shape (grid.count,).

    wave: vacuum Angstrom in the grid's frame; b: km/s; damping: Voigt's a. Lines of similar
    reach are evaluated together.
    """
    total = np.zeros(grid.count)
    half = np.ceil(reach(depth, b, damping) / grid.step).astype(int)
    place = grid.position(wave)
    classes = np.ceil(np.log2(np.maximum(half, 1)) * 2).astype(int)
    for group in np.unique(classes):
        rows = np.nonzero(classes == group)[0]
        width = int(half[rows].max())
        for part in np.array_split(rows, max(1, len(rows) * width // 500000)):
            _add(total, grid, (place[part], depth[part], b[part], damping[part]), width)
    return total


def _add(total, grid: Grid, lines, width: int) -> None:
    place, depth, b, damping = (values[:, None] for values in lines)
    index = np.rint(place).astype(int) + np.arange(-width, width + 1)
    tau = depth * relative_voigt((index - place) * grid.step, b, damping)
    inside = (index >= 0) & (index < grid.count)
    total += np.bincount(index[inside], tau[inside], grid.count)


def hydrogen_depth(grid: Grid, wave, wing) -> np.ndarray:
    """Balmer lines by a simplified Stark law: tau = (w / sqrt(x^2 + x0^2))^2.5.

    The exponent is Holtsmark's far wing of the linear Stark effect; w (``wing``, Angstrom)
    is where tau is one. x0 = 0.35 A rounds the centre in place of a Doppler core, which the
    saturation hides. Thermal and pressure shifts and the fine structure are left out.
    """
    total = np.zeros(grid.count)
    samples = grid.wave
    for centre, width in zip(wave, wing, strict=True):
        if width > 0:
            total += (width / np.hypot(samples - centre, 0.35)) ** 2.5
    return total


def balmer_wing(wave, wing_h_beta: float) -> np.ndarray:
    """Wing width of Balmer lines, Angstrom: H alpha a little narrower, high members fading.

    A rough fit to the look of such stars, no theory: scaled with n^-1 above n = 6.
    """
    upper = np.sqrt(4.0 / (1.0 - BALMER_LIMIT / np.asarray(wave, dtype=float)))
    factor = np.where(upper < 3.5, 0.8, np.where(upper > 6.5, 6.5 / upper, 1.0))
    return wing_h_beta * factor
