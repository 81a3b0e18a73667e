"""A second star: its lines are the features that the first star's leave unexplained.

Those features vote again. A second velocity is believed only with a margin well above the
one that declares a first, away from the first star's own lines, and when it names a fair
part of what it was asked to explain.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..spectra.medium import C_KM_S
from .populations import Component
from .velocity import stellar_vote, typical_width, vote_sigma

MARGIN = 25.0  # log-likelihood over chance and rivals; see the study of single stars
SHARE = 0.25  # of the open features that must stand on lines of the second star
MIN_FEATURES = 12
FAINTER = -0.3  # dex: strength of the second star's lines before anything is known


def find_second_star(setting, solution, star: Component, temperature: float) -> list[Component]:
    """The second star's component, or nothing.

    solution: the mixture with the first star alone; temperature: excitation temperature, K.
    """
    f = setting.features
    open_rows = np.nonzero((solution.unlisted > 0.5) & (f.sign > 0))[0]
    if len(open_rows) < MIN_FEATURES or setting.options.velocity is not None:
        return []
    low, high = setting.options.velocity_range
    result = stellar_vote(
        f.take(open_rows), setting.catalogue, setting.absorption(temperature), (low, high)
    )
    apart = abs(result.velocity - star.velocity) > max(typical_width(f), 5.0)
    if not (result.margin >= MARGIN and apart):
        return []
    if _explained(setting, open_rows, result.velocity, temperature) < SHARE:
        return []
    return [replace(star, velocity=result.velocity, error=result.error, log_ratio=FAINTER)]


def _explained(setting, rows, velocity: float, temperature: float) -> float:
    """Share of the open features within 3 sigma of a strong line at ``velocity``, less chance."""
    f = setting.features
    strength = setting.absorption(temperature)
    usable = np.nonzero(np.isfinite(strength))[0]
    inside = (setting.catalogue.wave[usable] > setting.coverage[0, 0]) & (
        setting.catalogue.wave[usable] < setting.coverage[-1, 1]
    )
    usable = usable[inside]
    count = min(2 * len(rows), len(usable))
    strong = np.sort(usable[np.argsort(-strength[usable], kind="stable")[:count]])
    place = setting.catalogue.wave[strong] * (1 + velocity / C_KM_S)
    if len(place) < 2:
        return 0.0
    reach = 3.0 * vote_sigma(f, rows)

    def hits(shift):
        x = f.wave[rows] + shift
        i = np.clip(np.searchsorted(place, x), 1, len(place) - 1)
        return np.mean(np.minimum(np.abs(place[i] - x), np.abs(place[i - 1] - x)) < reach)

    chance = np.mean([hits(s) for s in (-1.7, -0.9, 0.8, 1.6)])
    return float(hits(0.0) - chance)
