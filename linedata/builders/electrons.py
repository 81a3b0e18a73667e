"""The jumping electron of a line: effective quantum numbers and orbital momenta, from levels."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path

import numpy as np

from common import EV_PER_CM
from level_gaps import ORBITALS, allowed, occupation
from level_physics import ionisation_energies
from nist_levels import read_levels
from symbols import ELEMENTS

RYDBERG = 109737.31568  # cm-1
CLOSEST = 100.0  # cm-1 below the limit


@dataclass(frozen=True)
class Electron:
    """Orbital momentum and effective quantum number in the lower and the upper level."""

    l_low: int
    l_up: int
    n_low: float
    n_up: float


@lru_cache(maxsize=None)
def core_energies(source: Path, element: str, stage: int) -> dict[frozenset, float]:
    """Lowest level (cm-1) of the next ion by occupied orbitals."""
    levels = read_levels(source, element, stage + 1)
    found: dict[frozenset, float] = {}
    for k in range(len(levels) if levels else 0):
        key = frozenset(occupation(levels.configuration[k]).items())
        found[key] = min(found.get(key, np.inf), levels.energy[k])
    return found


def jumping_electron(source: Path, ion: tuple[str, int], levels, low: int, up: int) -> Electron | None:
    """The electron that jumps between two rows of ``levels``; None where it is not one alone.

    The effective quantum numbers follow from the ionisation energy and the lowest level of the
    core the electron leaves behind.
    """
    gone, _, come = allowed(levels, low, up).partition("-")
    if not come:
        return None
    core = occupation(levels.configuration[low])
    core[gone] -= 1
    key = frozenset((orbital, n) for orbital, n in core.items() if n)
    limit = ionisation_energies(source)[ELEMENTS.index(ion[0]), ion[1] - 1] / EV_PER_CM
    free = limit + core_energies(source, *ion).get(key, 0.0)
    if not levels.energy[up] <= free - CLOSEST:
        return None
    n_low, n_up = (
        ion[1] * float(np.sqrt(RYDBERG / (free - levels.energy[row]))) for row in (low, up)
    )
    return Electron(ORBITALS.index(gone[-1]), ORBITALS.index(come[-1]), n_low, n_up)
