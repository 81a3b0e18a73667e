"""Every temperature a spectrum gives, with its error and its name; which one is adopted.

The profile of the likelihood never diverges but is coarse; excitation and ionisation of the clean
lines are sharper where lines are clean and wrong where they are not. So they count only where
they agree with the profile, and then by the weight of their error. The curve of growth of the
same lines, whose species' levels are free, is shown beside them and counts in their place where
they fail.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..spectra.medium import C_KM_S
from .clean_lines import clean_lines, tilted_strength
from .growth import THETA_K, GrowthFit, fit_growth
from .ionisation import Balance, Gas, fit_balance
from .temperature import Profile, electron_pressure

GIVEN, NOMINAL, ADOPTED = "given", "nominal", "adopted"
PROFILE, GROWTH, BALANCE = "likelihood profile", "curve of growth", "ionisation balance"
STAGES = "excitation and ionisation"
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
AGREEMENT = 2.5  # sigma between profile and clean lines that count as agreement
# Share of T by which clean lines as broad as BROAD are off where lines stand close (cooler than
# HOT): whole lines, and what stands beside them, speak of deeper layers than cores do. Set on
# the Sun broadened to 50 and 100 km/s, on which it is also reported.
BLENDING, BROAD = 0.10, 100.0  # km/s, FWHM
VAGUE = 1.0  # dex: a hint at the pressure worse than this is none
MOVED = 0.04  # in ln T between claims and clean lines, from which claims are made again
HOT = 9000.0  # K: beyond, the profile follows the electron pressure, and is taken again at it


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


@dataclass(frozen=True, eq=False)
class Claimed:
    """What clean lines are taken from: the mixture's solution at ``temperature`` (K), the
    catalogue whose rows it names, the FeatureTable, a person's log10 electron pressure or
    None, and log10 abundances by atomic number, (92,)."""

    solution: object
    catalogue: object
    features: object
    temperature: float
    log_pe: float | None
    abundances: np.ndarray


def read_temperatures(found: Profile | float, claimed: Claimed, again=None) -> Adopted:
    """All excitation temperatures of a solved mixture.

    found: the profile, or the temperature (K) that a person gave.
    again: makes claims anew, ``solved(temperature, excess)``, and takes the profile anew,
    ``profiled(start, excess)``, with log Pe ``excess`` dex off the usual or given one.
    """
    growth = read_growth(claimed)
    balance = read_balance(claimed)
    if isinstance(found, Profile):
        found, balance = _followed(found, claimed, balance, again)
        return _weighed(found, growth, balance)
    first = TemperatureReading(GIVEN, float(found), float("nan"), KELVIN, True, "not searched")
    note = "not used: a temperature was given"
    rest = (*_stages(balance, note), *_growth(growth, note))
    rest += _pressure(balance, float(found), 0.0)
    return Adopted(float(found), float("nan"), (first, *rest))


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


def read_growth(claimed: Claimed) -> Growth | None:
    """Curve of growth of claims that were made at a temperature."""
    solution, catalogue, features = claimed.solution, claimed.catalogue, claimed.features
    lines = clean_lines(solution, catalogue, features)
    fit = fit_growth(lines)
    for _ in range(TILTS):
        if fit is None:
            return None
        tilt = fit.theta - THETA_K / claimed.temperature
        strength = tilted_strength(solution, catalogue, lines, tilt)
        lines = clean_lines(solution, catalogue, features, strength)
        fit = fit_growth(lines) or fit
    return None if fit is None else with_error(fit, claimed.temperature)


def read_balance(claimed: Claimed) -> Balance | None:
    """Temperature and electron pressure of claims that were made at a temperature."""
    lines = clean_lines(claimed.solution, claimed.catalogue, claimed.features)
    given = claimed.log_pe is not None
    gas = Gas(claimed.temperature, claimed.log_pe, claimed.abundances, given)
    found = fit_balance(lines, claimed.catalogue.species_names, gas)
    if found is None:
        return None
    leaning = LEANING * (found.temperature - claimed.temperature)
    more = float(np.hypot(leaning, _blended(claimed.features, found.temperature)))
    return found.less_sure(more)


def _blended(features, temperature: float) -> float:
    """Error in K of what lines as broad as these say together; none in hot stars, whose lines
    stand apart."""
    width = features.fwhm / features.wave
    if temperature > HOT or not np.any(np.isfinite(width)):
        return 0.0
    share = float(np.nanmedian(width)) * C_KM_S / BROAD
    return BLENDING * temperature * min(share**2, 1.0)


def _followed(found: Profile, claimed: Claimed, balance: Balance | None, again):
    """(profile, balance) after claims have followed the temperature and pressure found."""
    if balance is None or again is None or _doubt(found, balance):
        return found, balance
    if abs(np.log(balance.temperature / claimed.temperature)) > MOVED:
        solution = again.solved(balance.temperature, _excess(balance, claimed))
        here = replace(claimed, solution=solution, temperature=balance.temperature)
        balance = read_balance(here) or balance
    if balance.temperature > HOT and claimed.log_pe is None:
        follows = again.profiled(balance.temperature, _excess(balance, claimed))
        found = follows if np.isfinite(follows.error) else found
    return found, balance
    if abs(np.log(balance.temperature / claimed.temperature)) > MOVED:
        solution = again.solved(balance.temperature, balance.log_pe)
        here = replace(claimed, solution=solution, temperature=balance.temperature)
        balance = read_balance(here) or balance
    if balance.temperature > HOT and claimed.log_pe is None:
        excess = balance.log_pe - electron_pressure(balance.temperature)
        follows = again.profiled(balance.temperature, excess)
        found = follows if np.isfinite(follows.error) else found
    return found, balance


def _excess(balance: Balance, claimed: Claimed) -> float:
    """Electron pressure found over the usual or given one, dex."""
    usual = electron_pressure(balance.temperature) if claimed.log_pe is None else claimed.log_pe
    return balance.log_pe - usual


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


def _stages(balance: Balance | None, note: str, used: bool = False):
    if balance is None:
        return ()
    words = f"{balance.lines} lines; {note}"
    return (
        TemperatureReading(STAGES, balance.temperature, balance.error, KELVIN, used, words),
    )


def _weighed(found: Profile, growth: Growth | None, balance: Balance | None = None) -> Adopted:
    """Profile and clean lines together."""
    # The curve of growth must meet the peak itself, not what the stretches allow beside it.
    sharp = found.sharpness if np.isfinite(found.sharpness) else found.error
    doubts = {STAGES: _doubt(found, balance),
              GROWTH: _doubt(replace(found, error=sharp), growth)}  # fmt: skip
    sharper = next((r for r, doubt in ((balance, doubts[STAGES]), (growth, doubts[GROWTH]))
                    if not doubt), None)  # fmt: skip
    words = "" if np.isfinite(found.error) else "no peak inside the temperatures tried"
    one = TemperatureReading(PROFILE, found.temperature, found.error, KELVIN, True, words)
    mean, error = found.temperature, found.error
    if sharper is not None:
        values = np.array([found.temperature, sharper.temperature])
        own = np.array([found.error, sharper.error])
        weight = np.array([found.error if sharper is balance else sharp, sharper.error]) ** -2.0
        weight = weight / np.sum(weight)
        mean, error = float(np.sum(weight * values)), float(np.sqrt(np.sum((weight * own) ** 2)))
    note = "excitation temperature; no effective temperature"
    adopted = TemperatureReading(ADOPTED, mean, error, KELVIN, True, note)
    agrees, same = "agrees with the profile", "its lines count in the reading above"
    by_stage = sharper is not None and sharper is balance
    rest = _stages(balance, doubts[STAGES] or agrees, by_stage)
    rest += _growth(growth, same if by_stage else doubts[GROWTH] or agrees,
                    sharper is not None and not by_stage)  # fmt: skip
    rest += _pressure(balance, mean, error)
    return Adopted(mean, error, (adopted, one, *rest))


def _doubt(found: Profile, other: Growth | Balance | None) -> str:
    """Why clean lines are not used; empty where they are."""
    if other is None:
        return "too few clean lines"
    if not other.error <= LOOSEST * other.temperature:
        return "not used: too uncertain"
    apart = abs(other.temperature - found.temperature)
    if not apart <= AGREEMENT * np.hypot(other.error, found.error):
        return "not used: it disagrees with the profile"
    return ""


def _pressure(balance: Balance | None, temperature: float, error: float):
    """The electron pressure at the adopted temperature, as a hint."""
    if balance is None or not balance.pairs or not np.isfinite(error):
        return ()
    value, own = balance.pressure_at(temperature, error)
    if not own < VAGUE:
        return ()
    note = (f"log10 electron pressure from {', '.join(balance.pairs)}; a dwarf's usual one is "
            f"{electron_pressure(temperature):.1f}; {100 * balance.slope / temperature:+.2f} per "
            f"100 K; of the layer at {temperature:,.0f} K, in LTE: deeper ones have more; "
            "a hint only")  # fmt: skip
    return (TemperatureReading(BALANCE, value, own, PRESSURE, False, note),)
