"""Simulated stars for the studies, with the truth behind every feature.

Light and line lists come from the scripts of the sample spectra (`sample_spectra/studio`): lines
of the catalogue moved by their stated errors, log gf by theirs (0.2 dex where none is stated),
each species by 0.1 dex, another saturation law than the engine's, one line in twenty absent.
`engine_list` then takes one line in twenty away from the list the engine is given. Molecules are
not simulated. Anchors (how strong a star's lines are) are rough values of normal dwarfs, from
memory.
"""

from __future__ import annotations

import sys
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "app"), str(ROOT / "sample_spectra"), str(ROOT / "tests")]

from studio import detector, drawing, light  # noqa: E402
from studio.scenes import Camera, Scene, Star  # noqa: E402
from studio.truth import STELLAR, joined  # noqa: E402
from truths import upper_bound, within  # noqa: E402

from linewright.claims.temperature import electron_pressure  # noqa: E402
from linewright.lines.loading import load_catalogue  # noqa: E402
from linewright.spectra.medium import C_KM_S, air_to_vacuum, from_medium, vacuum_to_air  # noqa: E402
from linewright.spectra.spectrum import Segment, Spectrum  # noqa: E402

# Equivalent width (mA) of one line of a normal dwarf against temperature (K).
COOL = ("Fe I", 6173.334, (3500.0, 4500.0, 5200.0, 5800.0, 6500.0, 7600.0),
        (120.0, 100.0, 84.0, 68.0, 48.0, 22.0))
WARM = ("Mg II", 4481.2, (7500.0, 9200.0, 12500.0), (270.0, 300.0, 300.0))
HOT = ("He I", 4387.93, (12000.0, 15000.0, 20000.0, 25000.0, 30000.0),
       (150.0, 380.0, 560.0, 480.0, 300.0))
SPURIOUS = 0.05  # share of lines taken from the engine's list


def anchor(temperature: float) -> tuple[str, float, float]:
    """(species, air Angstrom, equivalent width in mA) of a normal dwarf."""
    table = COOL if temperature < 7600 else WARM if temperature < 12500 else HOT
    return table[0], table[1], float(np.interp(temperature, table[2], table[3]))


def star(temperature: float, velocity: float, vsini: float = 3.0, part: float = 1.0) -> Star:
    """A normal dwarf; part: its share of the light."""
    wing = float(np.interp(temperature, [4500, 5800, 7500, 9500, 15000, 30000],
                           [0.3, 0.9, 3.5, 7.0, 4.5, 2.0]))
    hot = temperature > 12000
    return Star(
        temperature, electron_pressure(temperature), velocity, anchor(temperature), vsini=vsini,
        turbulence=3.0 if hot else 1.3, light=part, core=0.75 if hot else 0.9,
        gamma=3e9 if hot else 1e9, wing=wing,
    )


def anchored_inside(one: Star, ranges) -> Star:
    """The same star with an anchor inside ``ranges`` (vacuum Angstrom): the drawing looks for
    it only there. Its equivalent width is what the usual anchor's scale gives it."""
    lines = load_catalogue(origins="stellar")
    lines = lines.take(np.isfinite(lines.loggf))
    near = lines.take(np.abs(lines.wave - air_to_vacuum(one.anchor[1])) < 1.0)
    scale = drawing.anchored(one, near, drawing.masses(near))
    inside = lines.take(within(lines.wave, ranges))
    broad = np.array([n in ("H I", "He I", "He II") for n in lines.species_names])
    b = drawing.doppler(drawing.masses(inside), one.temperature, one.turbulence)
    log_tau = drawing._strength(one, inside) - np.log10(b) + scale
    row = int(np.argmin(np.abs(np.where(broad[inside.species], 99.0, log_tau) - 0.3)))
    group = (inside.species == inside.species[row]) & (
        np.abs(inside.wave - inside.wave[row]) < 0.3
    )
    tau = float(np.sum(10.0 ** log_tau[group]))
    width = drawing.equivalent_width(tau, float(b[row]), float(inside.wave[row]), one)
    place = float(vacuum_to_air(inside.wave[row]))
    return replace(one, anchor=(inside.species_of(row), place, width))


def scene(name, seed, stars, ranges, resolution, sn, air=None) -> Scene:
    """ranges: vacuum Angstrom; sn: at the blaze peak, per pixel of 1/2.5 resolution element."""
    stars = [anchored_inside(one, ranges) for one in stars]
    camera = Camera(tuple(ranges), resolution, 1.0 / resolution / 2.5, sn**2 + 6.0 * sn,
                    log_step=True, order_constant=0.0)
    return Scene(name, "", name, "simulated", seed, "vacuum", "barycentric", "image", camera,
                 tuple(stars), air)


@dataclass(frozen=True, eq=False)
class Observed:
    """A simulated spectrum and its truth.

    wave, size, species: vacuum place, depth when alone, and name of the simulated lines,
        sorted; origin and component beside them
    """

    spectrum: Spectrum
    wave: np.ndarray
    size: np.ndarray
    species: np.ndarray
    origin: np.ndarray
    component: np.ndarray
    resolution: float


def observed(scene: Scene, catalogue=None) -> Observed:
    """Draw the lines, let the light through, read the detectors out."""
    catalogue = load_catalogue() if catalogue is None else catalogue
    table = joined(drawing.draw(scene, catalogue), STELLAR)
    table = {k: v[(table["status"] == "listed")] for k, v in table.items()}
    size = light.lone_depths(scene, table)
    table = {k: v[size > 1e-3] for k, v in table.items()}
    size = size[size > 1e-3]
    rng = np.random.default_rng([scene.seed, 2])
    chips = detector.chips(scene, light.received(scene, table), rng)
    segments = tuple(
        Segment(c.wave, c.flux, c.error, np.zeros(len(c.wave), dtype=bool)) for c in chips
    )
    place = from_medium(table["wave"], scene.medium) * (1 + table["velocity"] / C_KM_S)
    order = np.argsort(place)
    spectrum = Spectrum(
        segments, medium="vacuum", medium_from="simulated", frame=scene.frame,
        frame_from="simulated", name=scene.name,
    )
    return Observed(
        spectrum, place[order], size[order], table["species"][order], table["origin"][order],
        table["component"][order], scene.camera.resolution,
    )


def shares(seen: Observed, wave: float, fwhm: float, by="species") -> dict[str, float]:
    """Share of each simulated species (or origin, or component) in a feature: depths when
    alone, weighted by a Gaussian of 0.45 FWHM about its centre; {} where no line is within
    one FWHM."""
    width = max(float(np.nan_to_num(fwhm)), wave / seen.resolution)
    first, last = np.searchsorted(seen.wave, [wave - width, wave + width])
    weight = seen.size[first:last] * np.exp(
        -0.5 * ((seen.wave[first:last] - wave) / (0.45 * width)) ** 2
    )
    found: dict[str, float] = {}
    for name, part in zip(getattr(seen, by)[first:last], weight):
        found[str(name)] = found.get(str(name), 0.0) + float(part)
    whole = sum(found.values())
    return {name: part / whole for name, part in found.items()} if whole > 0 else {}


def engine_list(seed: int, catalogue=None, share: float = SPURIOUS):
    """The catalogue without ``share`` of its lines (hydrogen kept)."""
    catalogue = load_catalogue() if catalogue is None else catalogue
    rng = np.random.default_rng([seed, 3])
    hydrogen = np.array([name == "H I" for name in catalogue.species_names])[catalogue.species]
    kept = (rng.random(len(catalogue)) > share) | hydrogen
    less = catalogue.take(kept)
    return replace(less, identity=f"{catalogue.identity}-less-{seed}")


def stellar_velocities(session) -> list[float]:
    return sorted(v for origin, v, _ in session.components if origin == "stellar")


def named_right(claim, shares_here: dict) -> bool:
    """Blend-tolerant: the claimed species has a fifth of the truth, or the true main species
    is among the claim's contributors."""
    main = max(shares_here, key=shares_here.get)
    listed = claim.species == main or any(b[0] == main for b in claim.blend)
    return listed or shares_here.get(claim.species, 0.0) >= 0.2


def lower_bound(hits: int, trials: int) -> float:
    """95 % one-sided lower bound of a rate (Clopper-Pearson)."""
    return 1.0 - upper_bound(trials - hits, trials)


def rate(hits, trials) -> str:
    """'hits/trials = share (95 % bounds lower-upper)', each bound one-sided."""
    hits, trials = int(hits), int(trials)
    low, high = lower_bound(hits, trials), upper_bound(hits, trials)
    return f"{hits}/{trials} = {hits / max(trials, 1):.4f} (95 % bounds {low:.4f}, {high:.4f})"
