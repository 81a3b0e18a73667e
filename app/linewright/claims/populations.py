"""Predicted lines of each velocity component, on strength scales of their own.

A population is a set of lines whose predicted strengths are comparable: the star's
absorption lines, telluric lines, interstellar lines, a nebula's emission lines, the sky's.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..lines.catalogue import ORIGINS, LineCatalogue
from ..spectra.medium import C_KM_S
from .entries import ABSORPTION, EMISSION, Entries, join
from .ion_velocities import IonVelocities
from .problem import inside

STELLAR, TELLURIC, INTERSTELLAR, NEBULAR, SKY, HYDROGEN, EMITTED, OUTFLOW = range(8)
POPULATIONS = (
    "stellar", "telluric", "interstellar", "nebular", "sky", "hydrogen", "emitted", "outflow",
)
ORIGIN_OF = (
    "stellar", "telluric", "interstellar", "nebular", "sky", "stellar", "stellar", "stellar",
)
SIGNS = (
    ABSORPTION, ABSORPTION, ABSORPTION, EMISSION, EMISSION, ABSORPTION, EMISSION, ABSORPTION,
)
# Populations whose central depths the strengths do not predict: Stark-broadened hydrogen
# and helium, clouds of unknown column, sky lines of unknown subtraction, a star's own gas.
UNGRADED = (INTERSTELLAR, SKY, HYDROGEN, EMITTED, OUTFLOW)
# Lines in which stars, their chromospheres, discs and winds shine (air Angstrom); common
# practice, no source.
EMITTED_LINES = (
    ("H I", (6562.8, 4861.3, 4340.5, 4101.7, 3970.1, 3889.1, 3835.4, 8598.4, 8750.5, 8862.8)),
    ("He I", (3888.6, 4026.2, 4471.5, 4921.9, 5015.7, 5875.6, 6678.2, 7065.2)),
    ("He II", (4685.7,)),
    ("Ca II", (3933.66, 3968.47, 8498.0, 8542.1, 8662.1)),
    ("Na I", (5889.95, 5895.92)),
    ("Mg I", (5167.3, 5172.7, 5183.6)),
    ("Fe II", (4233.2, 4583.8, 4923.9, 5018.4, 5169.0, 5316.6)),
    ("Si II", (6347.1, 6371.4)),
    ("O I", (7771.9, 7774.2, 7775.4, 8446.4)),
)
CLOUD_SLOPE = 0.3  # of log gf: columns of clouds differ by more than oscillator strengths
DIFFUSE = -2.0  # strength of diffuse bands, which are shallow and have no log gf
SHINING = 1.5  # dex above the weakest detectable line that these are taken to be
BROAD_SPECIES = ("H I", "He I", "He II")
SAME_LINE = 0.003  # Angstrom
DEEPEST = 3.2  # dex below the weakest detectable line: beyond it a line cannot matter


@dataclass(frozen=True)
class Component:
    """A velocity at which lines of one population stand; km/s.

    log_ratio: flux share of a second star, dex; certainty: probability that the component
    is there at this velocity, which every claim on its lines inherits; ions: what each ion's
    velocity differs by, in a nebula.
    """

    population: int
    velocity: float
    error: float = 0.0
    log_ratio: float = 0.0
    certainty: float = 1.0
    ions: IonVelocities | None = None

    @property
    def origin(self) -> str:
        return ORIGIN_OF[self.population]


def strengths(catalogue: LineCatalogue, population: int, absorption):
    """log10 strength of every catalogue row in ``population``; NaN where it has none.

    absorption: Saha-Boltzmann strengths of the rows (lines.strengths).
    """
    origin = catalogue.origin
    nothing = np.full(len(catalogue), np.nan)
    if population in (STELLAR, HYDROGEN):
        broad = np.isin(catalogue.species, broad_species(catalogue))
        wanted = broad == (population == HYDROGEN)
        absorption = np.where((origin == ORIGINS.index("stellar")) & wanted, absorption, nothing)
        absorption[listed_twice(catalogue)] = np.nan
        return absorption
    if population == TELLURIC:
        return np.where(
            origin == ORIGINS.index("telluric"), np.log10(catalogue.depth_ref) + 2.0, nothing
        )
    if population == NEBULAR:
        return np.where(origin == ORIGINS.index("nebular"), catalogue.emission, nothing)
    if population == SKY:
        here = origin == ORIGINS.index("sky")
        return np.where(here, np.nan_to_num(catalogue.emission), nothing)
    if population in (EMITTED, OUTFLOW):
        nothing[emitted_rows(catalogue)] = SHINING
        return nothing
    here = origin == ORIGINS.index("interstellar")
    strength = CLOUD_SLOPE * catalogue.loggf - 0.5
    return np.where(here, np.where(np.isfinite(strength), strength, DIFFUSE), nothing)


def listed_twice(catalogue):
    """Stellar rows (k,) of an ion whose line stands beside them as a forbidden one, '[O I]'
    over 'O I': one line from two sources, which would be its own rival."""
    found = [np.zeros(0, dtype=int)]
    for code, name in enumerate(catalogue.species_names):
        if not name.startswith("[") or name.strip("[]") not in catalogue.species_names:
            continue
        ion = catalogue.species_names.index(name.strip("[]"))
        stellar = catalogue.origin == ORIGINS.index("stellar")
        places = catalogue.wave[stellar & (catalogue.species == code)]
        rows = np.nonzero(stellar & (catalogue.species == ion))[0] if len(places) else []
        for wave in places:
            found.append(rows[np.abs(catalogue.wave[rows] - wave) < SAME_LINE])
    return np.concatenate(found)


def emitted_rows(catalogue):
    """Rows (k,) of EMITTED_LINES: the strongest stellar line of the species at each place."""
    from ..spectra.medium import air_to_vacuum

    stellar, found = ORIGINS.index("stellar"), []
    for name, places in EMITTED_LINES:
        if name not in catalogue.species_names:
            continue
        code = catalogue.species_names.index(name)
        for wave in air_to_vacuum(np.array(places)):
            low, high = np.searchsorted(catalogue.wave, [wave - 0.25, wave + 0.25])
            rows = np.arange(low, high)
            rows = rows[(catalogue.species[rows] == code) & (catalogue.origin[rows] == stellar)]
            if len(rows):
                found.append(int(rows[np.nanargmax(np.nan_to_num(catalogue.loggf[rows], nan=-9.0))]))
    return np.unique(np.array(found, dtype=int))


def broad_species(catalogue) -> list[int]:
    return [i for i, name in enumerate(catalogue.species_names) if name in BROAD_SPECIES]


def zero_point(strength, observed, coverage, features: int) -> float:
    """The ``features``-th strongest line inside coverage: a first detection threshold."""
    usable = strength[inside(observed, coverage) & np.isfinite(strength)]
    if len(usable) == 0 or features == 0:
        return 0.0
    ranked = np.sort(usable)[::-1]
    return float(ranked[min(max(features, 5), len(ranked)) - 1])


def places(catalogue, component: Component):
    """(observed wavelength, its error by the velocity) of every row, vacuum Angstrom."""
    velocity, error = component.velocity, np.full(len(catalogue), component.error)
    if component.ions is not None:
        velocity = velocity + component.ions.shift
        error = np.hypot(error, component.ions.error)
    observed = catalogue.wave * (1.0 + velocity / C_KM_S)
    return observed, observed * error / C_KM_S


def predict(catalogue, absorption, component: Component, index: int, context) -> Entries:
    """Entries of one component.

    context: (coverage (k, 2), features by sign, number of species names, segment ranges).
    """
    coverage, counts, species_count, segments = context
    strength = strengths(catalogue, component.population, absorption) + component.log_ratio
    observed, unsure = places(catalogue, component)
    if component.population in (STELLAR, NEBULAR, HYDROGEN):
        emission = component.population == NEBULAR
        scale = strength if emission else absorption
        strength = strength - zero_point(scale, observed, coverage, counts[int(emission)])
    near = inside(observed, coverage + np.array([-2.0, 2.0])) & (strength > -DEEPEST)
    within = (observed >= segments[:, :1] - 2.0) & (observed <= segments[:, 1:] + 2.0)
    segment, rows = np.nonzero(within & near)
    error = np.hypot(catalogue.wave_err[rows], unsure[rows])
    return Entries(
        observed[rows],
        error,
        np.asarray(strength[rows], dtype=float),
        np.full(len(rows), component.population),
        np.full(len(rows), SIGNS[component.population]),
        catalogue.species[rows] + component.population * species_count,
        np.full(len(rows), index),
        rows,
        segment,
    )


def assemble(catalogue, absorption, components, searched) -> Entries:
    """All entries of all components.

    searched: (coverage (k, 2) in vacuum Angstrom of the spectrum's frame, merged and
    ascending; numbers of absorption and emission features; segment ranges (s, 2), one
    endless range unless segments overlap).
    """
    coverage, counts, segments = searched
    context = (coverage, counts, len(catalogue.species_names), segments)
    parts = [
        predict(catalogue, absorption, component, i, context)
        for i, component in enumerate(components)
    ]
    return join(parts)
