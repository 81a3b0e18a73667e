"""Level physics: partition functions, ionisation energies, abundances, Saha fractions.

Sources: partition functions Barklem & Collet 2016 (A&A 588, A96) for stages I-III to
10,000 K, continued above and for higher stages by direct sums over NIST levels; ionisation
energies NIST ASD (Kramida et al.); solar abundances Asplund et al. 2009 (ARA&A 47, 481).
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from ..errors import InputRefused
from ..resources import tables_dir
from .species import ELEMENTS, parse_species

BOLTZMANN_EV = 8.617333262e-5  # eV / K, CODATA 2022
BOLTZMANN_ERG = 1.380649e-16  # erg / K
# 2 (2 pi m_e k / h^2)^1.5 in cm-3 K-1.5, CODATA 2022
SAHA_CONSTANT = 4.829366e15


@dataclass(frozen=True)
class LevelTables:
    """temperature (t,), log_u (92, 5, t), ionisation_ev (92, 5), abundance (92,)."""

    temperature: np.ndarray
    log_u: np.ndarray
    ionisation_ev: np.ndarray
    abundance: np.ndarray


@lru_cache(maxsize=1)
def level_tables() -> LevelTables:
    """The shipped tables, read once."""
    with np.load(tables_dir() / "level_physics.npz") as stored:
        return LevelTables(
            stored["temperature"],
            stored["log_u"].astype(float),
            stored["ionisation_ev"],
            stored["abundance"],
        )


def _row(element: str) -> int:
    if element not in ELEMENTS:
        raise InputRefused(f"element '{element}'", "not a chemical symbol", "write it as 'Fe'")
    return ELEMENTS.index(element)


def _check_temperature(temperature) -> None:
    bad = ~(np.asarray(temperature, dtype=float) > 0)
    if np.any(bad):
        raise InputRefused("temperature", "must be above 0 K", "give it in kelvin")


def log_partition_all(temperature: float) -> np.ndarray:
    """log10 U of every element and stage, shape (92, 5); NaN where unknown."""
    _check_temperature(temperature)
    tables = level_tables()
    grid = np.log(tables.temperature)
    x = float(np.clip(np.log(temperature), grid[0], grid[-1]))
    k = int(np.clip(np.searchsorted(grid, x) - 1, 0, len(grid) - 2))
    w = (x - grid[k]) / (grid[k + 1] - grid[k])
    return (1 - w) * tables.log_u[:, :, k] + w * tables.log_u[:, :, k + 1]


def partition_function(species: str, temperature):
    """U of an atom or ion at temperature(s) in K (clamped to 1,000-50,000 K).

    Raises InputRefused for molecules and for ions without a table.
    """
    _check_temperature(temperature)
    parsed = parse_species(species)
    tables = level_tables()
    known = parsed.is_atomic and parsed.stage <= tables.log_u.shape[1]
    values = tables.log_u[_row(parsed.element), parsed.stage - 1] if known else [np.nan]
    if not np.isfinite(values[0]):
        raise InputRefused(f"species '{species}'", "no partition function", "choose an ion I-V")
    x = np.log(np.asarray(temperature, dtype=float))
    return 10.0 ** np.interp(x, np.log(tables.temperature), values)


def ionisation_energy(species: str) -> float:
    """Energy in eV to remove one electron from the ground state; NaN unknown."""
    parsed = parse_species(species)
    energies = level_tables().ionisation_ev
    if not parsed.is_atomic or parsed.stage > energies.shape[1]:
        return float("nan")
    return float(energies[_row(parsed.element), parsed.stage - 1])


def solar_abundance(element: str) -> float:
    """log10 N(element)/N(H) + 12 of the Sun; NaN unknown."""
    return float(level_tables().abundance[_row(element)])


def saha_ratio_log(u_ratio_log, energy_ev, temperature: float, log_pe: float):
    """log10 n(upper stage)/n(lower stage); log_pe is log10 electron pressure, dyn cm-2.

    Saha equation with n_e = P_e / kT; energies in eV, U ratio upper over lower.
    """
    log_ne = log_pe - np.log10(BOLTZMANN_ERG * temperature)
    constant = np.log10(SAHA_CONSTANT) + 1.5 * np.log10(temperature) - log_ne
    return constant + u_ratio_log - np.asarray(energy_ev) / (
        BOLTZMANN_EV * temperature * np.log(10.0)
    )


def ion_fractions_all(temperature: float, log_pe: float) -> np.ndarray:
    """log10 n(stage)/n(element), shape (92, 5); -inf beyond the stages known."""
    log_u = log_partition_all(temperature)
    energies = level_tables().ionisation_ev
    step = saha_ratio_log(log_u[:, 1:] - log_u[:, :-1], energies[:, :-1], temperature, log_pe)
    known = np.isfinite(step) & np.logical_and.accumulate(np.isfinite(step), axis=1)
    chain = np.concatenate(
        [np.zeros((len(step), 1)), np.cumsum(np.where(known, step, 0.0), axis=1)], axis=1
    )
    reached = np.concatenate([np.ones((len(step), 1), bool), known], axis=1)
    chain = np.where(reached, chain, -np.inf)
    top = chain.max(axis=1, keepdims=True)
    return chain - top - np.log10((10.0 ** (chain - top)).sum(axis=1, keepdims=True))


def ion_fractions(element: str, temperature: float, log_pe: float) -> np.ndarray:
    """n(stage)/n(element) of stages I-V (zeros where not known or not existing).

    temperature in K, log_pe = log10 electron pressure in dyn cm-2.
    """
    return 10.0 ** ion_fractions_all(temperature, log_pe)[_row(element)]


def boltzmann_ratio(g_ratio: float, energy_ev: float, temperature: float) -> float:
    """n(upper)/n(lower) = g_up/g_low exp(-dE/kT)."""
    return float(g_ratio * np.exp(-energy_ev / (BOLTZMANN_EV * temperature)))
