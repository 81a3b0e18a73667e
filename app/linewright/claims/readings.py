"""Every temperature a spectrum gives, with its error and its name; which one is adopted.

The profile of the likelihood never diverges but is coarse; the curve of growth is sharper where
lines are clean and wrong where they are not. So the second counts only where it agrees with the
first, and then by the weight of its error.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from .clean_lines import clean_lines, tilted_strength
from .growth import THETA_K, GrowthFit, fit_growth
from .ionisation import ionisation_balance
from .temperature import Profile, electron_pressure

GIVEN, NOMINAL, ADOPTED = "given", "nominal", "adopted"
PROFILE, GROWTH, BALANCE = "likelihood profile", "curve of growth", "ionisation balance"
PLANCK, WIEN = "Planck colour", "Wien colour"
KELVIN, PRESSURE = "K", "log10 dyn cm-2"
# dex per eV by which theta is off beyond its own error, for log gf scales drift with excitation:
# on simulated stars the errors then come true (tests/studies/temperature_study.py, seeds 1 and
# 2), and the halves of the Sun's spectrum differ by no more.
SYSTEMATIC = 0.02
# Share of the way to the temperature at which the claims were made that a curve of growth is
# drawn (the same stars, claims made 3,000 K off: 0.01 to 0.12).
LEANING = 0.08
TILTS = 2  # turns in which blend shares follow the temperature found
LOOSEST = 0.08  # relative error beyond which a curve of growth is shown but not used
AGREEMENT = 2.5  # sigma between profile and curve of growth that count as agreement


@dataclass(frozen=True)
class TemperatureReading:
    """One temperature (or the electron pressure that goes with it) and how it was read.

    label: one of the names above; value, error: in ``unit`` (NaN error: none known)
    used: whether predicted strengths rest on it; note: a caveat in words
    """

    label: str
    value: float
    error: float
    unit: str = KELVIN
    used: bool = False
    note: str = ""


@dataclass(frozen=True)
class Adopted:
    """temperature, error: K (NaN error where given or nominal); readings: all, adopted first"""

    temperature: float
    error: float
    readings: tuple[TemperatureReading, ...]


def read_temperatures(
    found: Profile | float, solution, catalogue, features, made_at: float
) -> Adopted:
    """All excitation temperatures of a solved mixture.

    found: the profile, or the temperature (K) that a person gave.
    solution: of the mixture, at the temperature ``made_at`` (K); catalogue: whose rows it
    names; features: FeatureTable.
    """
    growth = read_growth(solution, catalogue, features, made_at)
    if isinstance(found, Profile):
        temperature, error, readings = _weighed(found, growth)
    else:
        temperature, error = float(found), float("nan")
        first = TemperatureReading(GIVEN, temperature, error, KELVIN, True, "not searched")
        readings = (first, *_growth(growth, "not used: a temperature was given"))
    readings += _balance(growth, catalogue.species_names, temperature, error)
    return Adopted(temperature, error, readings)


def nominal(temperature: float) -> TemperatureReading:
    """The temperature (K) that stands in where no star's absorption lines are seen."""
    note = "no stellar absorption lines are seen"
    return TemperatureReading(NOMINAL, temperature, float("nan"), KELVIN, True, note)


@dataclass(frozen=True)
class Growth:
    """A curve of growth; temperature and its error, systematic parts included, in K."""

    fit: GrowthFit
    temperature: float
    error: float


def read_growth(solution, catalogue, features, made_at: float) -> Growth | None:
    """Curve of growth of claims that were made at a temperature ``made_at`` (K)."""
    lines = clean_lines(solution, catalogue, features)
    fit = fit_growth(lines)
    for _ in range(TILTS):
        if fit is None:
            return None
        tilt = fit.theta - THETA_K / made_at
        strength = tilted_strength(solution, catalogue, lines, tilt)
        lines = clean_lines(solution, catalogue, features, strength)
        fit = fit_growth(lines) or fit
    return None if fit is None else with_error(fit, made_at)


def with_error(fit: GrowthFit, made_at: float) -> Growth:
    """The fit with what its own error leaves out."""
    value = fit.temperature
    own = value * np.hypot(fit.theta_err, SYSTEMATIC) / fit.theta
    return Growth(fit, value, float(np.hypot(own, LEANING * (value - made_at))))


def _growth(growth: Growth | None, note: str, used: bool = False):
    if growth is None:
        return ()
    words = f"{growth.fit.lines} lines; {note}"
    return (
        TemperatureReading(GROWTH, growth.temperature, growth.error, KELVIN, used, words),
    )


def _weighed(found: Profile, growth: Growth | None):
    """(temperature, error, readings) of profile and curve of growth together."""
    one = TemperatureReading(PROFILE, found.temperature, found.error, KELVIN, True)
    doubt = _doubt(found, growth)
    if growth is None or doubt:
        if not np.isfinite(found.error):
            one = replace(one, note="no peak inside the temperatures tried")
        adopted = TemperatureReading(ADOPTED, found.temperature, found.error, KELVIN, True,
                                     "excitation temperature; no effective temperature")
        return found.temperature, found.error, (adopted, one, *_growth(growth, doubt))
    values = np.array([found.temperature, growth.temperature])
    weight = np.array([found.error, growth.error]) ** -2.0
    mean, error = float(np.sum(values * weight) / np.sum(weight)), float(np.sum(weight) ** -0.5)
    adopted = TemperatureReading(ADOPTED, mean, error, KELVIN, True,
                                 "excitation temperature; no effective temperature")
    return mean, error, (adopted, one, *_growth(growth, "agrees with the profile", True))


def _doubt(found: Profile, growth: Growth | None) -> str:
    """Why the curve of growth is not used; empty where it is."""
    if growth is None:
        return "too few clean lines"
    if growth.error > LOOSEST * growth.temperature:
        return "not used: too uncertain"
    apart = abs(growth.temperature - found.temperature)
    if not apart <= AGREEMENT * np.hypot(growth.error, found.error):
        return "not used: it disagrees with the profile"
    return ""


def _balance(growth: Growth | None, names, temperature: float, error: float):
    """The ionisation balance at the adopted temperature, as a hint."""
    if growth is None:
        return ()
    safe = error if np.isfinite(error) else growth.error
    hint = ionisation_balance(growth.fit, names, temperature, safe)
    if hint is None:
        return ()
    note = (f"log10 electron pressure from {', '.join(hint.pairs)}; a dwarf's usual one is "
            f"{electron_pressure(temperature):.1f}; {hint.per_100k:+.2f} per 100 K; "
            "one layer in LTE, a hint only")  # fmt: skip
    return (TemperatureReading(BALANCE, hint.log_pe, hint.error, PRESSURE, False, note),)
