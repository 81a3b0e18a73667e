"""Predicted depths of every catalogue line under the session's conditions."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..lines.catalogue import LineCatalogue
from ..session.model import Session

ASSUMED_K = 5200.0  # until a solve says better
DECADES = (-3.0, 3.0)  # log10 emissivity (H beta = 100 is 2) shown as the shortest, longest tooth


@dataclass(frozen=True)
class Conditions:
    """temperature in K; log10 electron pressure in dyn cm-2, None for the typical one
    emission: whether the features stand mostly in emission
    """

    temperature: float = ASSUMED_K
    log_pe: float | None = None
    emission: bool = False


def conditions(session: Session | None) -> Conditions:
    """What a session says of the gas; the Sun's temperature where it says nothing."""
    if session is None:
        return Conditions()
    temperature, log_pe = session.temperature_k, session.log_pe
    signs = session.features.sign
    return Conditions(
        float(temperature) if np.isfinite(temperature) else ASSUMED_K,
        float(log_pe) if np.isfinite(log_pe) else None,
        bool(len(signs) and np.mean(signs) < -0.3),
    )


def predicted_depths(catalogue: LineCatalogue, where: Conditions) -> np.ndarray:
    """Depth 0-1 of every line, shape (n,); 0 where nothing is predicted.

    Absorption by ``lines.depths``. Lines with an emission model but no depth, and all lines
    with one where the features are in emission, get their place on a logarithmic scale of
    emissivity (DECADES), since no profile is predicted for them.
    """
    from ..lines.depths import catalogue_depths

    depth = catalogue_depths(catalogue, where.temperature, where.log_pe)
    shining = np.isfinite(catalogue.emission)
    if not where.emission:
        shining &= ~np.isfinite(depth)
    low, high = DECADES
    shine = np.clip((catalogue.emission - low) / (high - low), 0.0, 1.0)
    return np.nan_to_num(np.where(shining, shine, depth), nan=0.0)
