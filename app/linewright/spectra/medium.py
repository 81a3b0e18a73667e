"""Air and vacuum wavelengths by Ciddor (1996), both ways.

Source: Ciddor P.E. 1996, Appl. Opt. 35, 1566 (standard air: 15 C, 101325 Pa, dry,
450 ppm CO2). Below 2000 A wavelengths are vacuum by convention of the trade.
"""

from __future__ import annotations

import numpy as np

C_KM_S = 299792.458
AIR_LIMIT = 2000.0


def refractivity(wave_vac):
    """n - 1 of standard air at vacuum wavelength(s) in Angstrom."""
    s2 = (1e4 / np.asarray(wave_vac, dtype=float)) ** 2
    return 5.792105e-2 / (238.0185 - s2) + 1.67917e-3 / (57.362 - s2)


def vacuum_to_air(wave_vac):
    """Air wavelength(s) in Angstrom of vacuum wavelength(s); below 2000 A unchanged."""
    wave = np.asarray(wave_vac, dtype=float)
    safe = np.where(wave < AIR_LIMIT, AIR_LIMIT, wave)
    return np.where(wave < AIR_LIMIT, wave, wave / (1.0 + refractivity(safe)))


def air_to_vacuum(wave_air):
    """Vacuum wavelength(s) of air wavelength(s): the exact inverse of vacuum_to_air.

    Fixed-point iteration; four rounds leave less than 1e-12 relative.
    """
    wave = np.asarray(wave_air, dtype=float)
    limit = float(vacuum_to_air(AIR_LIMIT))
    safe = np.where(wave < limit, limit, wave)
    vac = safe * (1.0 + refractivity(safe))
    for _ in range(4):
        vac = safe * (1.0 + refractivity(vac))
    return np.where(wave < limit, wave, vac)


def to_medium(wave_vac, medium: str):
    """Vacuum wavelengths expressed in ``medium`` ('air' or 'vacuum'; 'unknown' = vacuum)."""
    return vacuum_to_air(wave_vac) if medium == "air" else np.asarray(wave_vac, dtype=float)


def from_medium(wave, medium: str):
    """Wavelengths given in ``medium`` as vacuum ('unknown' is taken as vacuum)."""
    return air_to_vacuum(wave) if medium == "air" else np.asarray(wave, dtype=float)
