"""Velocities of a nebula's ions: gas of different ionisation moves differently.

Neutral gas, the ionised gas behind its front and the most ionised part of an H II region stand
several km/s apart (Orion: 10 km/s between N I and [O III], O'Dell 2001, Annu. Rev. Astron.
Astrophys. 39, 99, from memory). Each ion's velocity is learned from its likely lines, leaning on
the mean of its zone; for every line from the ion's other lines alone, so that none vouches for
itself.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..lines.levels import ionisation_energy
from ..lines.species import parse_species
from ..spectra.medium import C_KM_S

RYDBERG_EV = 13.6  # photons above it are used up by hydrogen: gas ionised by less is neutral gas
ION_SPREAD = 5.0  # km/s: ions of a zone about its mean
ZONE_SPREAD = 6.0  # km/s: zones about the nebula's velocity
FARTHEST = 30.0  # km/s: offsets beyond are no ion's
LIKELY = 0.3  # probability from which a pair counts
LED = 0.6  # share of its blend from which a line's place is its own
IONISED = ("H I", "He I", "He II")  # seen where they recombine


@dataclass(frozen=True, eq=False)
class IonVelocities:
    """Per catalogue row: km/s to add to the component's velocity, and its error."""

    shift: np.ndarray
    error: np.ndarray


def unknown(catalogue) -> IonVelocities:
    """Before anything is learned."""
    return IonVelocities(
        np.zeros(len(catalogue)), np.full(len(catalogue), float(np.hypot(ION_SPREAD, ZONE_SPREAD)))
    )


def neutral(species: str) -> bool:
    """Whether an ion's lines come from gas in which hydrogen is neutral."""
    parsed = parse_species(species)
    if parsed.ion in IONISED or not parsed.is_atomic:
        return False
    if parsed.stage == 1:
        return True
    before = ionisation_energy(f"{parsed.element} I")
    return parsed.brackets > 0 and parsed.stage == 2 and before < RYDBERG_EV


def learned(catalogue, solution, component: int, velocity: float) -> IonVelocities:
    """Velocities of the ions of a nebular component at ``velocity`` (km/s) from the pairs of a
    solution."""
    row, v, weight = _offsets(catalogue, solution, component)
    v = np.clip(v - velocity, -FARTHEST, FARTHEST)
    species = catalogue.species[row]
    count = len(catalogue.species_names)
    own_weight = np.bincount(row, weight, len(catalogue))
    own_sum = np.bincount(row, weight * v, len(catalogue))
    ion_weight, ion_sum = (np.bincount(species, w, count) for w in (weight, weight * v))
    low = np.array([neutral(name) for name in catalogue.species_names])
    mean, variance = _zones(ion_weight, ion_sum, low)
    rest = ion_weight[catalogue.species] - own_weight
    rest_sum = ion_sum[catalogue.species] - own_sum
    prior = 1.0 / (ION_SPREAD**2 + variance[catalogue.species])
    precision = np.maximum(rest, 0.0) + prior
    shift = (rest_sum + prior * mean[catalogue.species]) / precision
    return IonVelocities(shift, 1.0 / np.sqrt(precision))


def _offsets(catalogue, solution, component: int):
    """(catalogue row, km/s, inverse variance) of likely pairs."""
    e, f = solution.problem.entries, solution.problem.features
    entry = solution.entry
    used = (e.component[entry] == component) & (solution.probability > LIKELY)
    used &= solution.groups.share[entry] > LED
    feature, entry, p = solution.feature[used], entry[used], solution.probability[used]
    row = e.row[entry]
    error = np.hypot(f.error[feature], 0.03 * np.nan_to_num(f.fwhm[feature]))
    error = C_KM_S * np.hypot(error, f.excess[feature]) / f.wave[feature]
    v = C_KM_S * (f.wave[feature] / catalogue.wave[row] - 1.0)
    return row, v, p / error**2


def _zones(ion_weight, ion_sum, low):
    """Mean (km/s) and its variance of the zone of every ion, from the other ions of the zone."""
    seen = ion_weight > 0
    value = np.where(seen, ion_sum / np.where(seen, ion_weight, 1.0), 0.0)
    weight = np.where(seen, 1.0 / (1.0 / np.where(seen, ion_weight, 1.0) + ION_SPREAD**2), 0.0)
    mean, variance = np.zeros(len(seen)), np.zeros(len(seen))
    for zone in (low, ~low):
        total = np.sum(weight[zone]) - weight[zone] + 1.0 / ZONE_SPREAD**2
        mean[zone] = (np.sum((weight * value)[zone]) - (weight * value)[zone]) / total
        variance[zone] = 1.0 / total
    return mean, variance
