"""The emission nebula: lines by emissivity, a weak continuum, the night sky half removed."""

from __future__ import annotations

import numpy as np
from linewright.lines.catalogue import ORIGINS
from linewright.spectra.medium import C_KM_S, from_medium, to_medium

from .broadening import pixel_means
from .detector import Chip, centres, pixel_edges
from .drawing import ADDED, LEFT_OUT, span
from .profiles import Grid
from .scenes import Scene
from .truth import EMISSION, empty

VELOCITY = 52.6  # km/s
ION_DEX, LINE_DEX = 0.15, 0.08
FAINTEST = 0.02  # of H beta = 100
BRIGHT = 5.0  # lines above this are never left out
EXTINCTION = 0.35  # c(H beta), extinction falling as 1 / lambda
EXPANSION = 14.0  # km/s, rms of the nebula's own motions
STEP = 4.0  # km/s of the fine grid
CONTINUUM = 0.055  # of the H beta flux, per Angstrom, times 100
SKY_LINES, SKY_CONTINUUM = 0.16, 0.05  # sky before subtraction, same scale
LEFTOVER, LEFTOVER_SPREAD = 0.03, 0.06  # of a sky line's flux, after subtraction


def draw(scene: Scene, catalogue) -> list[dict]:
    """[nebular lines and unknown ones, sky residuals]."""
    rng = np.random.default_rng([scene.seed, 1])
    return [_nebular(scene, catalogue, rng), _sky(scene, catalogue, rng)]


def _rows(scene: Scene, catalogue, origin: str):
    low, high = span(scene, 0.0)
    return catalogue.take(
        (catalogue.origin == ORIGINS.index(origin)) & np.isfinite(catalogue.emission)
        & (catalogue.wave > low) & (catalogue.wave < high)
    )


def _nebular(scene: Scene, catalogue, rng) -> dict:
    lines = _rows(scene, catalogue, "nebular")
    names = np.array(lines.species_names)[lines.species]
    recombining = np.isin(names, ["H I", "He I"])
    ion = (ION_DEX * rng.standard_normal(len(lines.species_names)))[lines.species]
    change = np.where(recombining, 0.1, 1.0) * ion + np.where(
        recombining, 0.02, LINE_DEX) * rng.standard_normal(len(lines))
    flux = 10.0 ** (lines.emission + change)
    wave = lines.wave + lines.wave_err * rng.standard_normal(len(lines))
    gone = (rng.random(len(lines)) < LEFT_OUT) & (flux < BRIGHT)
    keep = flux > FAINTEST
    table = empty(int(keep.sum()), EMISSION)
    table["wave"] = to_medium(wave, scene.medium)[keep]
    table["listed_wave"] = to_medium(lines.wave, scene.medium)[keep]
    table["species"] = names[keep]
    table["flux"] = np.where(gone, 0.0, flux)[keep]
    table["status"] = np.where(gone, "absent", "listed")[keep]
    new = empty(max(3, round(ADDED * int(keep.sum()))), EMISSION)
    new["wave"] = rng.uniform(*scene.camera.ranges[0], len(new["wave"]))
    new["flux"] = 10.0 ** rng.uniform(-0.8, 0.6, len(new["wave"]))
    new["species"][:] = new["status"][:] = "unlisted"
    table = {name: np.concatenate([table[name], new[name]]) for name in table}
    table["origin"] = np.full(len(table["wave"]), "nebular", dtype="U24")
    table["component"] += 1
    table["velocity"] += VELOCITY
    return table


def _sky(scene: Scene, catalogue, rng) -> dict:
    lines = _rows(scene, catalogue, "sky")
    whole = 10.0**lines.emission * SKY_LINES
    left = LEFTOVER + LEFTOVER_SPREAD * rng.standard_normal(len(lines))
    keep = whole > 0.05
    table = empty(int(keep.sum()), EMISSION)
    table["wave"] = to_medium(lines.wave, scene.medium)[keep]
    table["listed_wave"] = table["wave"]
    table["species"] = np.array(lines.species_names)[lines.species][keep]
    table["origin"][:] = "sky"
    table["component"] += 1
    table["velocity"] += scene.air.velocity
    table["flux"] = (whole * left)[keep]
    table["status"][:] = "listed"
    return table


def extinction(wave) -> np.ndarray:
    """Transmission relative to H beta."""
    return 10.0 ** (-EXTINCTION * (4861.0 / np.asarray(wave) - 1.0))


def continuum(wave) -> np.ndarray:
    """Recombination and dust-scattered light a pixel's Angstrom, with a Balmer step."""
    wave = np.asarray(wave, dtype=float)
    step = 1.0 + 1.5 / (1.0 + np.exp((wave - 3720.0) / 12.0))
    return CONTINUUM * (wave / 5000.0) ** -0.9 * step * extinction(wave)


def _profiles(scene: Scene, grid: Grid, table, flux, own_motion: float) -> np.ndarray:
    """Flux density of Gaussian lines on the grid."""
    sigma = np.hypot(C_KM_S / scene.camera.resolution / 2.35482, own_motion)
    rest = from_medium(table["wave"], scene.medium)
    centre = rest * (1.0 + table["velocity"] / C_KM_S)
    width = centre * sigma / C_KM_S
    half = int(6 * sigma / grid.step) + 1
    place = grid.position(centre)[:, None]
    index = np.rint(place).astype(int) + np.arange(-half, half + 1)
    profile = np.exp(-0.5 * ((index - place) * grid.step / sigma) ** 2)
    profile *= (flux / width / np.sqrt(2 * np.pi))[:, None]
    inside = (index >= 0) & (index < grid.count)
    return np.bincount(index[inside], profile[inside], grid.count)


def expose(scene: Scene, table, rng) -> list[Chip]:
    """The calibrated spectrum: units of a thousandth of H beta's flux an Angstrom."""
    low, high = span(scene)
    grid = Grid.over(low, high, STEP)
    edges = pixel_edges(scene.camera, *scene.camera.ranges[0])
    wave = centres(scene.camera, edges)
    vacuum = from_medium(edges, scene.medium)
    sky = {k: v[table["origin"] == "sky"] for k, v in table.items()}
    own = {k: v[table["origin"] == "nebular"] for k, v in table.items()}
    shine = _profiles(scene, grid, own, own["flux"] * extinction(own["wave"]), EXPANSION)
    shine += _profiles(scene, grid, sky, sky["flux"], 0.0)
    clean = pixel_means(grid, shine, vacuum) + continuum(wave)
    # The whole sky's photons stay as noise where the sky itself has been subtracted.
    night = _profiles(scene, grid, sky, np.abs(sky["flux"]) / LEFTOVER_SPREAD, 0.0)
    night = pixel_means(grid, night, vacuum) + SKY_CONTINUUM
    efficiency = np.exp(-(((wave - 6300.0) / 2600.0) ** 2))
    scale = scene.camera.electrons / 60.0 * efficiency * np.diff(edges)
    sigma = np.sqrt((clean + night).clip(0) * scale + scene.camera.read_noise**2) / scale
    flux = clean + sigma * rng.standard_normal(len(wave))
    return [Chip(wave, 10.0 * flux, 10.0 * sigma)]
