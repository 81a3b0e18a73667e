"""Excitation temperature from the profile of the mixture's likelihood.

It ranks predicted strengths; it is no effective temperature.
"""

from __future__ import annotations

import numpy as np

# Rough photospheric electron pressures (log10 dyn cm-2) of dwarfs at the depth where weak
# lines form; common practice, no source. Ranking hardly depends on it.
_PE_T = np.array([3000.0, 4000.0, 5000.0, 6000.0, 8000.0, 10000.0, 15000.0, 20000.0, 30000.0])
_PE = np.array([-1.0, 0.0, 0.8, 1.3, 2.3, 2.7, 2.9, 3.1, 3.5])

USUAL, USUAL_WIDTH = 5000.0, 0.25
COARSE = (3800.0, 5000.0, 6500.0, 9000.0, 13000.0, 20000.0, 30000.0)


def electron_pressure(temperature: float) -> float:
    """log10 of a dwarf's electron pressure (dyn cm-2) at an excitation temperature in K."""
    return float(np.interp(temperature, _PE_T, _PE))


def prior_log(temperature: float) -> float:
    """Mild preference for the temperature where most stars under study stand: it decides
    only while features are few."""
    return -0.5 * (np.log(temperature / USUAL) / USUAL_WIDTH) ** 2


def neighbours(temperature: float) -> tuple[float, ...]:
    """Temperatures to try around one of COARSE."""
    return tuple(
        round(t / 50.0) * 50.0 for t in temperature * np.array([0.8, 0.88, 0.94, 1.06, 1.13, 1.22])
    )


def peak(temperatures, log_likelihood) -> float:
    """Temperature of the largest likelihood, refined by a parabola in log T; K."""
    order = np.argsort(temperatures)
    t = np.log(np.asarray(temperatures, dtype=float)[order])
    y = np.asarray(log_likelihood, dtype=float)[order]
    k = int(np.argmax(y))
    if k in (0, len(y) - 1):
        return float(np.exp(t[k]))
    a, b, _ = np.polyfit(t[k - 1 : k + 2] - t[k], y[k - 1 : k + 2], 2)
    shift = float(np.clip(-b / (2 * a), t[k - 1] - t[k], t[k + 1] - t[k])) if a < 0 else 0.0
    return float(np.exp(t[k] + shift))
