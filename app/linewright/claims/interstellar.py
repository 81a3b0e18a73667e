"""Interstellar clouds: velocities at which unexplained features repeat the resonance lines."""

from __future__ import annotations

import numpy as np

from ..lines.catalogue import ORIGINS
from ..spectra.medium import C_KM_S
from .populations import INTERSTELLAR, Component

MAX_CLOUDS = 3
MIN_LINES = 2
CHANCE = 0.003  # expected chance coincidences a cloud must beat
SPAN = 250.0  # km/s about the spectrum's zero
NARROW = 0.1  # Angstrom: lines with worse positions (diffuse bands) do not vote


def find_clouds(setting, solution, stellar_velocity: float) -> list[Component]:
    """Clouds shown by at least two resonance lines among features the rest leaves unexplained.

    A cloud within 3 sigma of the star's own velocity cannot be told from it and is left out.
    """
    cat, f = setting.catalogue, setting.features
    rows = np.nonzero(
        (cat.origin == ORIGINS.index("interstellar")) & (cat.wave_err < NARROW)
    )[0]
    open_features = np.nonzero((solution.unlisted > 0.5) & (f.sign > 0))[0]
    if len(rows) == 0 or len(open_features) == 0:
        return []
    feature, row = np.meshgrid(open_features, rows, indexing="ij")
    v = C_KM_S * (f.wave[feature] / cat.wave[row] - 1.0)
    sigma = np.maximum(C_KM_S * np.hypot(f.wave_err[feature], 0.003) / f.wave[feature], 0.3)
    near = np.abs(v) < SPAN
    return _clusters(
        v[near], sigma[near], row[near], setting, open_features, stellar_velocity
    )


def _clusters(v, sigma, row, setting, open_features, stellar_velocity) -> list[Component]:
    clouds = []
    free = np.ones(len(v), dtype=bool)
    while len(clouds) < MAX_CLOUDS and np.any(free):
        close = np.abs(v[:, None] - v[None, :]) < 2.5 * np.hypot(sigma[:, None], sigma[None, :])
        lines = [len(set(row[close[i] & free])) if free[i] else 0 for i in range(len(v))]
        best = int(np.argmax(lines))
        if lines[best] < MIN_LINES:
            break
        members = close[best] & free
        free &= ~members
        weight = 1.0 / sigma[members] ** 2
        mean = float(np.sum(weight * v[members]) / np.sum(weight))
        chance = _chance(v[best], sigma[best], set(row[members]), setting, open_features)
        if chance < CHANCE and not abs(mean - stellar_velocity) < 3.0:
            clouds.append(Component(INTERSTELLAR, mean, float(1.0 / np.sqrt(weight.sum()))))
    return clouds


def _chance(v, sigma, rows, setting, open_features) -> float:
    """Expected number of such coincidences by chance, from the density of open features."""
    wave, window = setting.features.wave[open_features], SPAN / C_KM_S
    rates, trials = [], []
    for r in sorted(rows):
        place = setting.catalogue.wave[r]
        near = np.sum(np.abs(wave / place - 1.0) < window)
        rates.append(near / (2 * SPAN) * 5.0 * sigma)
        trials.append(near)
    return float(min(trials) * np.prod(np.sort(rates)[::-1][:-1]))
