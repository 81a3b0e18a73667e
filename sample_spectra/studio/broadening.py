"""Rotation and instrument as kernels on a constant velocity grid, and pixels."""

from __future__ import annotations

import numpy as np
from linewright.spectra.medium import C_KM_S

from .profiles import Grid

LIMB = 0.6  # linear limb darkening


def rotation_kernel(vsini: float, step: float) -> np.ndarray:
    """Rotation profile of a linearly limb-darkened sphere, unit sum (Gray's textbook form)."""
    half = int(np.ceil(vsini / step))
    x = np.arange(-half, half + 1) * step / vsini
    disc = np.clip(1.0 - x * x, 0.0, None)
    profile = 2 * (1 - LIMB) * np.sqrt(disc) + 0.5 * np.pi * LIMB * disc
    return profile / profile.sum()


def instrument_kernel(resolution: float, step: float) -> np.ndarray:
    """Gaussian of FWHM c/R, unit sum."""
    sigma = C_KM_S / resolution / 2.3548200450309493 / step
    half = int(np.ceil(5 * sigma))
    profile = np.exp(-0.5 * (np.arange(-half, half + 1) / sigma) ** 2)
    return profile / profile.sum()


def broadened(flux: np.ndarray, kernel: np.ndarray) -> np.ndarray:
    """Convolution whose ends are continued by the end values."""
    half = len(kernel) // 2
    padded = np.pad(flux, half, mode="edge")
    return np.convolve(padded, kernel, mode="valid")


def pixel_means(grid: Grid, flux: np.ndarray, edges: np.ndarray) -> np.ndarray:
    """Mean flux between neighbouring vacuum wavelengths ``edges``; shape (len(edges) - 1,)."""
    wave = grid.wave
    area = np.concatenate([[0.0], np.cumsum(0.5 * (flux[1:] + flux[:-1]) * np.diff(wave))])
    return np.diff(np.interp(edges, wave, area)) / np.diff(edges)
