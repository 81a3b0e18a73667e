"""All temperatures of a solved spectrum: those of its lines and those of its continuum."""

from __future__ import annotations

import re
import warnings

import numpy as np

from ..claims.colour import ColourFit, planck_colour, wien_colour
from ..claims.readings import PLANCK, WIEN, TemperatureReading

RED, BLUE = 10_000.0, 4000.0  # Angstrom; bluer the Balmer jump and crowded metal lines rule
C_A_S = 2.99792458e18  # speed of light, Angstrom per second
PER_WAVELENGTH, PER_FREQUENCY = "wavelength", "frequency"
_WORDS = {"flam": PER_WAVELENGTH, "fnu": PER_FREQUENCY, "jy": PER_FREQUENCY,
          "mjy": PER_FREQUENCY, "ujy": PER_FREQUENCY, "nanomaggy": PER_FREQUENCY,
          "nanomaggies": PER_FREQUENCY}  # fmt: skip
_CAVEAT = "of the continuum alone, {low:.0f}-{high:.0f} A; dust reddens it; never used for lines"
_NARROW = 800.0  # Angstrom: a shorter continuum shows no colour
_VAGUE = 0.5  # relative error at which a colour says nothing


def colour_readings(spectrum, measurement) -> tuple[TemperatureReading, ...]:
    """Planck and Wien colour temperatures of a flux-calibrated spectrum.

    Empty where the flux unit is no flux density (counts, normalised, not stated), where the
    continuum is too short, or where no black body fits.
    """
    kind = flux_density(spectrum.flux_unit)
    if not kind:
        return ()
    wave, flux, error = _continuum(measurement)
    if len(wave) == 0 or wave[-1] - wave[0] < _NARROW:
        return ()
    if kind == PER_FREQUENCY:
        flux = flux * C_A_S / wave**2
    fits = ((PLANCK, planck_colour), (WIEN, wien_colour))
    made = ((label, fit(wave, flux, error)) for label, fit in fits)
    return tuple(_reading(label, fit) for label, fit in made if fit is not None and _tells(fit))


def flux_density(unit: str) -> str:
    """'wavelength' or 'frequency' where ``unit`` is a flux density per either; else ''."""
    word = " ".join(str(unit).lower().replace("[", "").replace("]", "").split())
    if word in _WORDS:
        return _WORDS[word]
    text = re.sub(r"\b(ang|angstroms|aa|a)\b", "Angstrom", str(unit), flags=re.IGNORECASE)
    text = re.sub(r"^\s*(1(\.0*)?\s*[eE]\s*[-+]?\d+|10\s*(\^|\*\*)\s*\(?[-+]?\d+\)?)\s*\*?", "", text)
    return _by_dimension(text.replace("^", "**").replace("ergs", "erg"))


def _by_dimension(text: str) -> str:
    if not text.strip():
        return ""
    from astropy import units as u  # half a second to load, and most spectra state no unit

    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            unit = u.Unit(text.strip())
    except (ValueError, TypeError):
        return ""
    if unit.is_equivalent(u.Unit("W m-3")):
        return PER_WAVELENGTH
    return PER_FREQUENCY if unit.is_equivalent(u.Unit("W m-2 Hz-1")) else ""


def _continuum(measurement):
    """(wave, flux, relative error) of the continuum's nodes between BLUE and RED, ascending."""
    used = [s for s in measurement.segments if s is not None]
    if not used:
        return np.zeros(0), np.zeros(0), np.zeros(0)
    columns = [np.concatenate([np.asarray(getattr(s, name)) for s in used])
               for name in ("node_wave", "node_flux", "node_err")]  # fmt: skip
    inside = (columns[0] >= BLUE) & (columns[0] <= RED)
    order = np.argsort(columns[0][inside], kind="stable")
    return tuple(column[inside][order] for column in columns)


def _tells(fit: ColourFit) -> bool:
    return bool(np.isfinite(fit.error) and fit.error < _VAGUE * fit.temperature)


def _reading(label: str, fit: ColourFit) -> TemperatureReading:
    note = _CAVEAT.format(low=fit.low, high=fit.high)
    return TemperatureReading(label, fit.temperature, fit.error, note=note)
