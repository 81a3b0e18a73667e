"""Predicted depths of every catalogue line under the session's conditions."""

from __future__ import annotations

import numpy as np

from ..lines.catalogue import LineCatalogue
from ..session.model import Session

SOLAR = (5200.0, 1.0)  # K and log10 dyn cm-2, until a solve says better


def conditions(session: Session | None) -> tuple[float, float]:
    """(temperature in K, log10 electron pressure in dyn cm-2) to predict with."""
    temperature = session.temperature_k if session is not None else np.nan
    log_pe = session.log_pe if session is not None else np.nan
    return (
        float(temperature) if np.isfinite(temperature) else SOLAR[0],
        float(log_pe) if np.isfinite(log_pe) else SOLAR[1],
    )


def predicted_depths(
    catalogue: LineCatalogue,
    temperature: float,
    log_pe: float,
    low: float,
    high: float,
    features: int,
) -> np.ndarray:
    """Depth 0-1 of every line, shape (n,); 0 where nothing is predicted.

    S is the strength of ``lines.strengths``; its zero point is that of the line ranked
    ``features`` (at least one in 1.5 Angstrom) between low and high, vacuum Angstrom. The depth follows
    0.9 / (1 + 10^(1.1 - 0.85 (S - S0))), the saturation curve through a few per cent at
    the zero point. Emission lines use their relative emissivity on the same footing.
    """
    from ..lines.strengths import absorption_strength

    strength = absorption_strength(catalogue, temperature, log_pe)
    first, last = np.searchsorted(catalogue.wave, [low, high])
    rank = max(features, int((high - low) / 1.5))
    depth = _saturated(strength, strength[first:last], rank)
    telluric = np.isfinite(catalogue.depth_ref)
    depth[telluric] = 1.0 - np.exp(-np.clip(catalogue.depth_ref[telluric], 0.0, 50.0))
    only_emission = ~np.isfinite(strength) & np.isfinite(catalogue.emission)
    shine = catalogue.emission[only_emission]
    depth[only_emission] = np.clip((shine + 3.0) / 6.0, 0.0, 1.0)  # 10^-3 to 10^3 of H beta = 100
    return depth


def _saturated(strength: np.ndarray, inside: np.ndarray, rank: int) -> np.ndarray:
    known = np.sort(inside[np.isfinite(inside)])[::-1]
    if not len(known):
        return np.zeros(len(strength))
    zero = known[min(rank, len(known)) - 1]
    return np.nan_to_num(0.9 / (1.0 + 10.0 ** (1.1 - 0.85 * (strength - zero))), nan=0.0)
