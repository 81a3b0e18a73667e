"""Predicted absorption strength of every catalogue line in LTE.

S = log gf + log10(lambda / 5000 A) - (5040/T) chi + log10(n_ion/n_el) - log10 U + A_el:
log10 of the line's opacity up to a constant (Saha and Boltzmann).
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from .catalogue import LineCatalogue
from .levels import BOLTZMANN_EV, ion_fractions_all, level_tables, log_partition_all
from .species import ELEMENTS, parse_species

FREE_OF_METALLICITY = ("H", "He")


def abundance_vector(
    metallicity: float = 0.0, abundances: Mapping[str, float] | None = None
) -> np.ndarray:
    """A(element) by atomic number, shape (92,): solar + [M/H] + [X/Fe]; -inf unknown.

    metallicity is [M/H] in dex (H and He excepted); abundances maps symbols to [X/Fe].
    """
    values = level_tables().abundance.copy()
    metals = np.array([symbol not in FREE_OF_METALLICITY for symbol in ELEMENTS])
    values[metals] += metallicity
    for symbol, excess in (abundances or {}).items():
        parsed = parse_species(f"{symbol.strip()} I")
        values[parsed.atomic_number - 1] += excess
    # Elements without a solar value keep a place far below the rest instead of vanishing.
    return np.where(np.isfinite(values), values, -2.0)


def species_offsets(
    catalogue: LineCatalogue,
    temperature: float,
    log_pe: float,
    metallicity: float = 0.0,
    abundances: Mapping[str, float] | None = None,
) -> np.ndarray:
    """log10(n_ion/n_el) - log10 U + A_el per catalogue species; NaN where not atomic."""
    fractions = ion_fractions_all(temperature, log_pe)
    log_u = log_partition_all(temperature)
    level = abundance_vector(metallicity, abundances)
    offsets = np.full(len(catalogue.species_names), np.nan)
    for k, name in enumerate(catalogue.species_names):
        species = parse_species(name)
        z, stage = species.atomic_number - 1, species.stage - 1
        if species.is_atomic and stage < log_u.shape[1]:
            offsets[k] = fractions[z, stage] - log_u[z, stage] + level[z]
    return offsets


def absorption_strength(
    catalogue: LineCatalogue,
    temperature: float,
    log_pe: float,
    metallicity: float = 0.0,
    abundances: Mapping[str, float] | None = None,
) -> np.ndarray:
    """S of every line, shape (n,); NaN where the catalogue has no log gf or no E_low.

    temperature in K, log_pe = log10 electron pressure in dyn cm-2, metallicity [M/H] and
    abundances {symbol: [X/Fe]} in dex. The continuum opacity is left out: over 3000-11000 A
    that of H minus varies by a factor two, less than the scatter of the strengths.
    """
    offsets = species_offsets(catalogue, temperature, log_pe, metallicity, abundances)
    theta = 1.0 / (BOLTZMANN_EV * temperature * np.log(10.0))
    strength = np.log10(catalogue.wave / 5000.0)
    strength += catalogue.loggf
    strength -= theta * catalogue.e_low
    strength += offsets[catalogue.species]
    return strength
