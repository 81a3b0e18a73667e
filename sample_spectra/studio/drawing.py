"""Line lists drawn from the catalogue, and made to differ from it.

Wavelengths move by their stated errors, log gf by theirs (0.2 dex where none is stated),
every species by 0.1 dex; one line in twenty is left out and as many unknown ones are added.
"""

from __future__ import annotations

import numpy as np
from linewright.lines.catalogue import ORIGINS
from linewright.lines.species import parse_species
from linewright.lines.strengths import absorption_strength
from linewright.spectra.medium import C_KM_S, air_to_vacuum, to_medium

from .profiles import balmer_wing
from .scenes import Cloud, Scene, Star
from .truth import STELLAR, empty

SPECIES_DEX = 0.1
LOGGF_DEX = 0.2
LEFT_OUT = 0.05
ADDED = 0.05
KEPT_TAU = 30.0  # the few strongest lines are never left out: a star would look wrong
WEAKEST = 0.003  # optical depth below which a line is not simulated
UNLISTED_MASS = 56.0


def doppler(mass, temperature: float, turbulence: float) -> np.ndarray:
    """Doppler b in km/s of atoms of ``mass`` (u): thermal and turbulent."""
    return np.sqrt(0.0166289 * temperature / np.asarray(mass) + turbulence**2)


def atomic_mass(number) -> np.ndarray:
    """Rough atomic mass (u) from the atomic number; enough for a thermal width."""
    number = np.asarray(number, dtype=float)
    return np.where(number < 2, 1.0, number * (2.0 + 0.5 * np.clip((number - 18) / 60, 0, 1.2)))


def masses(catalogue) -> np.ndarray:
    """Mass of every row's atom, u; UNLISTED_MASS for what is no atom."""
    parsed = [parse_species(name) for name in catalogue.species_names]
    per_name = [atomic_mass(p.atomic_number) if p.is_atomic else UNLISTED_MASS for p in parsed]
    return np.array(per_name, dtype=float)[catalogue.species]


def anchored(star: Star, catalogue, mass) -> float:
    """What to add to S - log10(b) for the anchor line to have its equivalent width."""
    species, air, wanted = star.anchor
    strength = _strength(star, catalogue)
    names = np.array(catalogue.species_names)[catalogue.species]
    near = (names == species) & (np.abs(catalogue.wave - air_to_vacuum(air)) < 0.3)
    total = np.log10(np.sum(10.0 ** strength[near]))
    b = float(doppler(mass[near][0], star.temperature, star.turbulence))
    wave = float(catalogue.wave[near].mean())
    trial = np.linspace(-2.0, 4.0, 241)
    widths = [equivalent_width(10.0**t, b, wave, star) for t in trial]
    return float(np.interp(wanted, widths, trial)) - total + np.log10(b)


def equivalent_width(tau: float, b: float, wave: float, star: Star) -> float:
    """Milliangstrom of one isolated line under the saturation law of ``light``."""
    from .profiles import relative_voigt

    v = np.linspace(0.0, 400.0, 4001)
    a = star.gamma * wave * 1e-13 / (4 * np.pi * b)
    opacity = tau * relative_voigt(v, b, a)
    depth = opacity * star.core / (opacity + star.core)
    return 2000.0 * float(np.sum(0.5 * (depth[1:] + depth[:-1]) * np.diff(v))) * wave / C_KM_S


def _strength(star: Star, catalogue) -> np.ndarray:
    strength = absorption_strength(catalogue, star.temperature, star.log_pe, star.metallicity)
    return np.where(np.isfinite(strength), strength, -99.0)


def span(scene: Scene, margin: float = 30.0) -> tuple[float, float]:
    """Vacuum limits of the simulated light, Angstrom."""
    low = min(r[0] for r in scene.camera.ranges)
    high = max(r[1] for r in scene.camera.ranges)
    if scene.medium == "air":
        low, high = (float(air_to_vacuum(w)) for w in (low, high))
    return low - margin, high + margin


def perturbed(lines, rng) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """(wavelengths, changes of log gf and abundance in dex, who is left out)."""
    wave = lines.wave + lines.wave_err * rng.standard_normal(len(lines))
    scatter = np.where(lines.loggf_err > 0, lines.loggf_err, LOGGF_DEX)
    change = scatter * rng.standard_normal(len(lines))
    change += (SPECIES_DEX * rng.standard_normal(len(lines.species_names)))[lines.species]
    hydrogen = np.array([name == "H I" for name in lines.species_names])[lines.species]
    left_out = (rng.random(len(lines)) < LEFT_OUT) & ~hydrogen
    return wave, np.where(hydrogen, 0.0, change), left_out


def stellar_lines(scene: Scene, catalogue, rng) -> list[dict]:
    """One table a star; the atoms' errors and the unknown lines are common to all stars."""
    low, high = span(scene)
    lines = catalogue.take(
        (catalogue.origin == ORIGINS.index("stellar"))
        & (catalogue.wave > low) & (catalogue.wave < high) & np.isfinite(catalogue.loggf)
    )
    moved = perturbed(lines, rng)
    tables = [_star_table(scene, k, lines, moved) for k in range(len(scene.stars))]
    new = _unknown(scene, tables[0], rng)
    return [_with_unknown(table, new, scene.stars[k]) for k, table in enumerate(tables)]


def _star_table(scene: Scene, which: int, lines, moved) -> dict:
    star, mass = scene.stars[which], masses(lines)
    wave, change, left_out = moved
    b = doppler(mass, star.temperature, star.turbulence)
    log_tau = _strength(star, lines) + change - np.log10(b) + anchored(star, lines, mass)
    names = np.array(lines.species_names)[lines.species]
    hydrogen = names == "H I"
    keep = (log_tau > np.log10(WEAKEST)) | hydrogen
    table = empty(int(keep.sum()), STELLAR)
    table["wave"] = to_medium(wave, scene.medium)[keep]
    table["listed_wave"] = to_medium(lines.wave, scene.medium)[keep]
    table["species"] = names[keep]
    table["origin"][:] = "stellar"
    table["component"] += which + 1
    table["velocity"] += star.velocity
    gone = left_out & (log_tau < np.log10(KEPT_TAU))
    table["status"] = np.where(gone, "absent", "listed")[keep]
    table["log_tau"] = np.where(hydrogen, 0.0, log_tau)[keep]
    table["width"] = np.where(hydrogen, balmer_wing(wave, star.wing), b)[keep]
    return table


def _unknown(scene: Scene, first: dict, rng):
    """(own-medium wavelengths, log tau) of lines no catalogue has, over the detectors."""
    known = first["log_tau"][(first["log_tau"] > -1.7) & (first["species"] != "H I")]
    count = max(3, round(ADDED * len(known)))
    low = min(r[0] for r in scene.camera.ranges)
    high = max(r[1] for r in scene.camera.ranges)
    strength = rng.choice(known, count) + 0.2 * rng.standard_normal(count)
    return rng.uniform(low, high, count), np.minimum(strength, 1.0)


def _with_unknown(table: dict, new, star: Star) -> dict:
    wave, log_tau = new
    more = empty(len(wave), STELLAR)
    more["wave"], more["log_tau"] = wave, log_tau
    more["species"][:] = more["status"][:] = "unlisted"
    more["origin"][:] = "stellar"
    more["component"] += table["component"][0]
    more["velocity"] += star.velocity
    more["width"] += doppler(UNLISTED_MASS, star.temperature, star.turbulence)
    return {name: np.concatenate([table[name], more[name]]) for name in table}


def telluric_lines(scene: Scene, catalogue, rng) -> dict:
    """Lines of the Earth's air at the scene's air mass and water column."""
    low, high = span(scene)
    lines = catalogue.take(
        (catalogue.origin == ORIGINS.index("telluric"))
        & (catalogue.wave > low) & (catalogue.wave < high)
    )
    names = np.array(lines.species_names)[lines.species]
    tau = lines.depth_ref * scene.air.air_mass
    tau = tau * np.where(names == "H2O", scene.air.water, 1.0)
    tau = tau * 10.0 ** (0.05 * rng.standard_normal(len(lines)))
    wave = lines.wave + lines.wave_err * rng.standard_normal(len(lines))
    keep = tau > WEAKEST
    table = empty(int(keep.sum()), STELLAR)
    table["wave"] = to_medium(wave, scene.medium)[keep]
    table["listed_wave"] = to_medium(lines.wave, scene.medium)[keep]
    table["species"] = names[keep]
    table["origin"][:] = "telluric"
    table["component"] += 1
    table["velocity"] += scene.air.velocity
    table["status"][:] = "listed"
    table["log_tau"] = np.log10(tau[keep])
    table["width"] += 0.4
    return table


def interstellar_lines(scene: Scene, which: int, catalogue, rng) -> dict:
    """Lines of one cloud: tau = 1.497e-2 N f lambda / b (cgs)."""
    cloud: Cloud = scene.clouds[which]
    low, high = span(scene, 0.0)
    names = np.array(catalogue.species_names)[catalogue.species]
    columns = dict(cloud.columns)
    rows = np.nonzero(
        (catalogue.origin == ORIGINS.index("interstellar")) & np.isfinite(catalogue.loggf)
        & (catalogue.wave > low) & (catalogue.wave < high) & np.isin(names, list(columns))
    )[0]
    lower = np.nan_to_num(2.0 * catalogue.j_low[rows] + 1.0, nan=1.0)
    f_value = 10.0 ** catalogue.loggf[rows] / lower
    column = 10.0 ** np.array([columns[n] for n in names[rows]])
    tau = 1.497e-2 * column * f_value * catalogue.wave[rows] * 1e-8 / (cloud.b * 1e5)
    table = empty(len(rows), STELLAR)
    moved = catalogue.wave_err[rows] * rng.standard_normal(len(rows))
    table["wave"] = to_medium(catalogue.wave[rows] + moved, scene.medium)
    table["listed_wave"] = to_medium(catalogue.wave[rows], scene.medium)
    table["species"] = names[rows]
    table["origin"][:] = "interstellar"
    table["component"] += which + 1
    table["velocity"] += cloud.velocity
    table["status"][:] = "listed"
    table["log_tau"] = np.log10(tau)
    table["width"] += cloud.b
    keep = table["log_tau"] > np.log10(WEAKEST)
    return {name: values[keep] for name, values in table.items()}


def draw(scene: Scene, catalogue) -> list[dict]:
    """All line tables of a star's scene, in the order in which random numbers are spent."""
    rng = np.random.default_rng([scene.seed, 1])
    tables = stellar_lines(scene, catalogue, rng)
    if scene.air is not None:
        tables.append(telluric_lines(scene, catalogue, rng))
    tables += [
        interstellar_lines(scene, k, catalogue, rng) for k in range(len(scene.clouds))
    ]
    return tables
