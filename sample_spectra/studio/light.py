"""Light of a scene as it reaches the pixels, and the depth each line alone would show.

Photospheres saturate by Minnaert's formula 1/depth = 1/tau + 1/core on the summed optical
depth; air and clouds by exp(-tau).
"""

from __future__ import annotations

import numpy as np
from linewright.spectra.medium import C_KM_S, from_medium

from .broadening import broadened, instrument_kernel, rotation_kernel
from .drawing import span
from .profiles import Grid, hydrogen_depth, optical_depth, relative_voigt
from .scenes import Scene

STEP = 0.4  # km/s
AIR_HALF_WIDTH = 0.05  # cm-1, pressure broadening of telluric lines
CLOUD_GAMMA = 6e7  # rad/s


def damping(scene: Scene, table, rows) -> np.ndarray:
    """Voigt's a of the rows by where they come from."""
    wave, b = table["wave"][rows], table["width"][rows]
    origin = table["origin"][rows][0]
    if origin == "telluric":
        return AIR_HALF_WIDTH * wave * 1e-8 * C_KM_S / b
    gamma = CLOUD_GAMMA
    if origin == "stellar":
        gamma = scene.stars[int(table["component"][rows][0]) - 1].gamma
    return gamma * wave * 1e-13 / (4 * np.pi * b)


def _moved(scene: Scene, table, rows) -> np.ndarray:
    """Vacuum wavelengths in the spectrum's frame."""
    rest = from_medium(table["wave"][rows], scene.medium)
    return rest * (1.0 + table["velocity"][rows] / C_KM_S)


def _present(table, origin: str, component: int | None = None) -> np.ndarray:
    chosen = (table["origin"] == origin) & (table["status"] != "absent")
    if component is not None:
        chosen &= table["component"] == component
    return np.nonzero(chosen)[0]


def _depths(scene: Scene, grid: Grid, table, rows) -> np.ndarray:
    hydrogen = (table["species"][rows] == "H I") & (table["origin"][rows] == "stellar")
    metal = rows[~hydrogen]
    total = np.zeros(grid.count)
    if len(metal):
        total += optical_depth(
            grid, _moved(scene, table, metal), 10.0 ** table["log_tau"][metal],
            table["width"][metal], damping(scene, table, metal))
    if hydrogen.any():
        rows = rows[hydrogen]
        total += hydrogen_depth(grid, _moved(scene, table, rows), table["width"][rows])
    return total


def received(scene: Scene, table) -> tuple[Grid, np.ndarray]:
    """Continuum-normalised light on a fine grid after stars, clouds, air and instrument."""
    grid = Grid.over(*span(scene), STEP)
    light = np.zeros(grid.count)
    for k, star in enumerate(scene.stars):
        tau = _depths(scene, grid, table, _present(table, "stellar", k + 1))
        depth = tau * star.core / (tau + star.core)
        light += star.light * (1.0 - broadened(depth, rotation_kernel(star.vsini, STEP)))
    for origin in ("interstellar", "telluric"):
        rows = _present(table, origin)
        if len(rows):
            light *= np.exp(-_depths(scene, grid, table, rows))
    return grid, broadened(light, instrument_kernel(scene.camera.resolution, STEP))


def lone_depths(scene: Scene, table) -> np.ndarray:
    """Central depth of every line if it stood alone, broadened and diluted; 0 if absent."""
    result = np.zeros(len(table["wave"]))
    groups = [("stellar", k + 1) for k in range(len(scene.stars))]
    for origin, component in [*groups, ("telluric", None), ("interstellar", None)]:
        rows = _present(table, origin, component)
        star = scene.stars[component - 1] if component else None
        kernel = instrument_kernel(scene.camera.resolution, STEP)
        if star is not None:
            kernel = np.convolve(kernel, rotation_kernel(star.vsini, STEP))
        hydrogen = np.array(table["species"][rows] == "H I") & (origin == "stellar")
        for part in np.array_split(rows[~hydrogen], len(rows) // 2000 + 1):
            if len(part):
                result[part] = _lone(scene, table, part, star, kernel)
        for row in rows[hydrogen]:
            result[row] = _lone_hydrogen(table, row, star)
    return result


def _lone(scene: Scene, table, rows, star, kernel) -> np.ndarray:
    half = len(kernel) // 2
    v = np.arange(-half, half + 1) * STEP
    tau = 10.0 ** table["log_tau"][rows][:, None] * relative_voigt(
        v, table["width"][rows][:, None], damping(scene, table, rows)[:, None])
    depth = 1.0 - np.exp(-tau) if star is None else (
        star.light * tau * star.core / (tau + star.core))
    return depth @ kernel


def _lone_hydrogen(table, row: int, star) -> float:
    tau = (max(float(table["width"][row]), 1e-3) / 0.35) ** 2.5
    return star.light * tau * star.core / (tau + star.core)
