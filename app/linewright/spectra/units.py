"""Wavelength units as files spell them, and how each becomes Angstrom.

Wavelengths keep the medium of the file. Frequency, energy and wavenumber are vacuum
quantities: lambda = c/nu = hc/E = 1/wavenumber (CODATA 2018 exact constants).
"""

from __future__ import annotations

import functools
import re
import warnings
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from ..errors import InputRefused

C_A_HZ = 2.99792458e18  # speed of light, Angstrom per second
HC_EV_A = 12398.419843320026  # h c, eV Angstrom
J_PER_EV = 1.602176634e-19


@dataclass(frozen=True)
class WaveUnit:
    """A spectral unit: ``to_angstrom`` maps its numbers to Angstrom.

    ``vacuum``: the quantity is a vacuum one by nature (frequency, energy, wavenumber).
    """

    name: str
    to_angstrom: Callable[[np.ndarray], np.ndarray]
    vacuum: bool = False


def _scaled(name: str, factor: float) -> WaveUnit:
    return WaveUnit(name, lambda x: np.asarray(x, dtype=float) * factor)


def _inverse(name: str, constant: float) -> WaveUnit:
    def convert(x):
        with np.errstate(divide="ignore", invalid="ignore"):
            return constant / np.asarray(x, dtype=float)

    return WaveUnit(name, convert, vacuum=True)


ANGSTROM = WaveUnit("Angstrom", lambda x: np.asarray(x, dtype=float))
METRE = _scaled("m", 1e10)
LOG10_ANGSTROM = WaveUnit("log10(Angstrom)", lambda x: 10.0 ** np.asarray(x, dtype=float))
LN_ANGSTROM = WaveUnit("ln(Angstrom)", lambda x: np.exp(np.asarray(x, dtype=float)))

_LENGTHS = {
    "Angstrom": (1.0, "a aa ang angs angstrom angstroms angstroem ångström å 0.1nm 0.1 nm"),
    "nm": (10.0, "nm nanometer nanometers nanometre nanometres nanom"),
    "um": (1e4, "um micron microns µm μm mum micrometer micrometers micrometre"),
    "mm": (1e7, "mm millimeter millimetre"),
    "cm": (1e8, "cm centimeter centimetre"),
    "m": (1e10, "m meter meters metre metres"),
}
_INVERSES = {
    "cm-1": (1e8, "cm-1 1/cm cm^-1 cm**-1 /cm kayser kaysers wavenumber"),
    "m-1": (1e10, "m-1 1/m m^-1 m**-1 /m"),
    "Hz": (C_A_HZ, "hz hertz"),
    "kHz": (C_A_HZ / 1e3, "khz"),
    "MHz": (C_A_HZ / 1e6, "mhz"),
    "GHz": (C_A_HZ / 1e9, "ghz"),
    "THz": (C_A_HZ / 1e12, "thz"),
    "eV": (HC_EV_A, "ev"),
    "keV": (HC_EV_A / 1e3, "kev"),
    "J": (HC_EV_A * J_PER_EV, "j joule joules"),
}
_LOGS = {
    LOG10_ANGSTROM: "log loglam log10 log10(angstrom) log10(lambda) log(angstrom) log10angstrom "
    "dex(angstrom) log10(wavelength)",
    LN_ANGSTROM: "ln ln(angstrom) ln(lambda) lnlam",
}


def _spellings() -> dict[str, WaveUnit]:
    table = {}
    for name, (factor, words) in _LENGTHS.items():
        unit = ANGSTROM if name == "Angstrom" else _scaled(name, factor)
        table.update(dict.fromkeys(words.split(), unit))
    for name, (constant, words) in _INVERSES.items():
        table.update(dict.fromkeys(words.split(), _inverse(name, constant)))
    for unit, words in _LOGS.items():
        table.update(dict.fromkeys(words.split(), unit))
    return table


_TABLE = _spellings()


@functools.lru_cache(maxsize=2000)
def wave_unit(text: str) -> WaveUnit | None:
    """The unit a file's spelling means; None when it is no spectral unit."""
    word = " ".join(str(text).split())
    if not word:
        return None
    known = _TABLE.get(word.lower().strip("[]() ")) or _TABLE.get(word.lower())
    if known is not None and word not in ("A/s",):
        return known
    inside = re.search(r"[\[(]([^\])]+)[\])]", word)
    if inside and inside.group(1) != word:
        found = wave_unit(inside.group(1))
        if found is not None and found.name != "J":
            return found
    return _from_astropy(word)


def _from_astropy(word: str) -> WaveUnit | None:
    from astropy import units as u

    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            unit = u.Unit(word)
        factor = float((1.0 * unit).to_value(u.AA, equivalencies=u.spectral()))
    except (ValueError, TypeError, u.UnitConversionError):
        return None
    if unit.is_equivalent(u.AA):
        return _scaled(word, factor)
    return _inverse(word, factor)


def required_unit(text: str, what: str = "--unit") -> WaveUnit:
    """The unit named by the user. Raises InputRefused when it is no spectral unit."""
    unit = wave_unit(text)
    if unit is None:
        raise InputRefused(
            what, f"'{text}' is not a wavelength, frequency, energy or wavenumber unit",
            "use Angstrom, nm, um, log10(Angstrom), cm-1, Hz or eV",
        )
    return unit


def guess_unit(wave: np.ndarray, what: str) -> tuple[WaveUnit, str]:
    """(unit, note) of wavelengths whose unit nothing states.

    Numbers of 2000 and above are taken as Angstrom; smaller ones could be nm, um or
    Angstrom and are refused.
    """
    good = wave[np.isfinite(wave)]
    middle = float(np.median(good)) if good.size else float("nan")
    if middle >= 2000.0:
        return ANGSTROM, "wavelength unit not stated: Angstrom assumed from the numbers"
    raise InputRefused(
        what, f"wavelength unit not stated and the numbers (about {middle:.4g}) could be several",
        "say --unit nm, um, Angstrom or log10(Angstrom)",
    )
