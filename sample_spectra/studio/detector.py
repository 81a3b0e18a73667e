"""Pixels, blaze, photon and read noise, cosmic rays."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from linewright.spectra.medium import from_medium

from .broadening import pixel_means
from .scenes import Camera, Scene


@dataclass(frozen=True, eq=False)
class Chip:
    """One detector's or order's pixels: own-medium wavelengths, flux, one-sigma error."""

    wave: np.ndarray
    flux: np.ndarray
    error: np.ndarray


def pixel_edges(camera: Camera, low: float, high: float) -> np.ndarray:
    """Own-medium pixel edges from half a step below ``low``.

    Linear steps fall on one raster over all detectors, so that one axis can hold them.
    """
    if camera.log_step:
        count = int(np.log(high / low) / camera.step) + 1
        return low * np.exp((np.arange(count + 1) - 0.5) * camera.step)
    raster = camera.ranges[0][0]
    low = raster + camera.step * np.rint((low - raster) / camera.step)
    count = int((high - low) / camera.step) + 1
    return low + (np.arange(count + 1) - 0.5) * camera.step


def centres(camera: Camera, edges: np.ndarray) -> np.ndarray:
    if camera.log_step:
        return np.sqrt(edges[1:] * edges[:-1])
    return 0.5 * (edges[1:] + edges[:-1])


def order_of(camera: Camera, wave) -> np.ndarray:
    """Number of the echelle order whose centre is nearest."""
    return np.rint(camera.order_constant / np.asarray(wave))


def blaze(camera: Camera, wave, order) -> np.ndarray:
    """Efficiency of an order, sinc^2 in the distance from its centre in free spectral ranges."""
    if camera.order_constant <= 0:
        return np.ones(len(wave))
    return np.sinc(0.92 * (camera.order_constant / wave - order)) ** 2


def response(camera: Camera, wave, order, low: float, high: float) -> np.ndarray:
    """Relative electrons a pixel: blaze times a smooth colour curve of detector and lamp."""
    place = (wave - low) / (high - low)
    return blaze(camera, wave, order) * (0.62 + 0.9 * place - 0.55 * place**2)


def exposed(scene: Scene, seen, edges: np.ndarray, order, rng) -> Chip:
    """Read-out pixels of one chip. ``seen`` is (grid, normalised light)."""
    camera = scene.camera
    wave = centres(camera, edges)
    grid, light = seen
    clean = pixel_means(grid, light, from_medium(edges, scene.medium))
    low, high = (min(camera.ranges)[0], max(camera.ranges)[1])
    scale = camera.electrons * response(camera, wave, order, low, high)
    expected = np.clip(clean, 0.0, None) * scale
    sigma = np.sqrt(expected + camera.read_noise**2)
    counts = expected + sigma * rng.standard_normal(len(wave))
    if camera.keep_blaze:
        return Chip(wave, counts, sigma)
    ripple = 1.0 + 0.004 * np.sin(wave / 41.0 + 2.0 * rng.random())  # imperfect normalisation
    return Chip(wave, counts / scale * ripple, sigma / scale)


def hit(chip: Chip, count: int, rng) -> tuple[Chip, np.ndarray, np.ndarray]:
    """(chip with cosmic rays, pixels hit, excess over the local flux)."""
    flux, error = chip.flux.copy(), chip.error.copy()
    level = float(np.median(chip.flux))
    pixels = np.sort(rng.choice(len(flux) - 2, count, replace=False))
    excess = level * 10.0 ** rng.uniform(-0.9, 0.9, count)
    share = rng.uniform(0.0, 0.5, count)
    np.add.at(flux, pixels, excess)
    np.add.at(flux, pixels + 1, excess * share)
    error = np.sqrt(error**2 + np.maximum(flux - chip.flux, 0.0))
    return Chip(chip.wave, flux, error), pixels, excess / level


def chips(scene: Scene, seen, rng) -> list[Chip]:
    """Every detector, or every echelle order where the blaze is left in and orders exist."""
    camera = scene.camera
    if scene.layout == "orders":
        return [exposed(scene, seen, edges, m, rng) for m, edges in order_edges(camera)]
    made = []
    for low, high in camera.ranges:
        edges = pixel_edges(camera, low, high)
        order = 0.0
        if camera.order_constant > 0:
            order = order_of(camera, centres(camera, edges))
        made.append(exposed(scene, seen, edges, order, rng))
    return made


def order_edges(camera: Camera) -> list[tuple[float, np.ndarray]]:
    """(order, pixel edges), blue to red, as many pixels each; neighbours overlap by a tenth
    of a free spectral range or more."""
    low, high = camera.ranges[0]
    first, last = (float(order_of(camera, w)) for w in (high, low))
    half = int(0.55 / first / camera.step)
    offsets = np.exp(np.arange(-half, half + 1) * camera.step)
    return [(m, camera.order_constant / m * offsets) for m in np.arange(last - 1, first, -1.0)]
