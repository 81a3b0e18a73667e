"""The wavelength axis a FITS header describes.

Linear and -LOG axes and the older log-linear keywords are computed here; the other
algorithms of FITS Paper III (Greisen et al. 2006, A&A 446, 747) go through astropy.wcs.
"""

from __future__ import annotations

import re
import warnings
from dataclasses import dataclass

import numpy as np

from ..errors import InputRefused
from .units import ANGSTROM, METRE, WaveUnit, guess_unit, wave_unit

_LINEAR_NAMES = ("", "LINEAR", "LAMBDA", "WAVELENGTH", "PIXEL", "ANGSTROM", "ANGSTROMS")
SPECTRAL_CODES = ("WAVE", "AWAV", "FREQ", "ENER", "WAVN", "VRAD", "VOPT", "ZOPT", "VELO", "BETA")
_DEFAULT_UNIT = {"WAVE": "m", "AWAV": "m", "FREQ": "Hz", "ENER": "J", "WAVN": "m-1"}
_VELOCITY_WORDS = ("km/s", "m/s", "kms", "km s-1", "velocity", "vel", "rv")
C_M_S = 299792458.0


@dataclass(frozen=True, eq=False)
class Axis:
    """Axis numbers, their unit, the medium the type states ('' = says nothing), words."""

    values: np.ndarray
    unit: WaveUnit
    medium: str
    words: str
    note: str = ""


def _number(header, *keys):
    for key in keys:
        value = header.get(key)
        if isinstance(value, (int, float)) and not isinstance(value, bool):
            return float(value)
    return None


def _pixels(header, count: int, number: int) -> np.ndarray:
    """Pixel offsets from the reference pixel, shape (count,)."""
    reference = _number(header, f"CRPIX{number}")
    start = 1.0 if reference is None else reference
    return np.arange(1, count + 1, dtype=float) - start


def _step(header, number: int):
    """The increment an axis states; the matrix keyword wins over CDELT when both stand."""
    return _number(header, f"CD{number}_{number}", f"CDELT{number}")


def _coefficients(header, count: int):
    start, step = _number(header, "COEFF0"), _number(header, "COEFF1")
    if start is None or step is None or step == 0:
        return None
    return Axis(10.0 ** (start + step * np.arange(count)), ANGSTROM, "",
                "log-linear axis of COEFF0 and COEFF1")


def _flagged_log(header, count: int, number: int):
    start, step = _number(header, f"CRVAL{number}"), _step(header, number)
    if header.get("DC-FLAG") != 1 or start is None or step is None or not 0 < start < 10:
        return None
    return Axis(10.0 ** (start + step * _pixels(header, count, number)), ANGSTROM, "",
                "log-linear axis of the DC-FLAG keyword")


def _refuse_velocity(header, number: int, what: str) -> None:
    words = " ".join(str(header.get(f"{key}{number}", "")) for key in ("CTYPE", "CUNIT")).lower()
    if any(re.search(rf"(?:^|[^a-z]){re.escape(w)}(?:$|[^a-z])", words) for w in _VELOCITY_WORDS):
        raise InputRefused(
            what, f"axis {number} is a velocity ({words.strip()}) with no rest wavelength: a "
            "cross-correlation or line profile, not a spectrum",
            "give the spectrum it was made from",
        )


def _linear_unit(header, number: int, kind: str) -> WaveUnit | None:
    stated = str(header.get(f"CUNIT{number}", "")).strip()
    if stated:
        return wave_unit(stated)
    found = wave_unit(str(header.get(f"CTYPE{number}", "")))
    if found is None:
        unit_words = re.search(r"units\s*=\s*([A-Za-z]+)", str(header.get(f"WAT{number}_001", "")))
        found = wave_unit(unit_words.group(1)) if unit_words else None
    return found or (wave_unit(_DEFAULT_UNIT[kind]) if kind in _DEFAULT_UNIT else None)


def _linear(header, count: int, number: int, kind: str, what: str) -> Axis | None:
    start, step = _number(header, f"CRVAL{number}"), _step(header, number)
    if start is None or step is None or step == 0:
        return None
    log = str(header.get(f"CTYPE{number}", "")).upper().rstrip().endswith("-LOG")
    offset = _pixels(header, count, number) * step
    with np.errstate(over="ignore", invalid="ignore"):
        values = start * np.exp(offset / start) if log and start else start + offset
    unit, note = _linear_unit(header, number, kind), ""
    if unit is None and str(header.get(f"CUNIT{number}", "")).strip():
        return None
    if unit is None:
        unit, note = guess_unit(values, what)
    medium = {"AWAV": "air", "WAVE": "vacuum"}.get(kind, "vacuum" if unit.vacuum else "")
    return Axis(values, unit, medium, "log-linear axis" if log else "linear axis", note)


def _rest_wavelength(header) -> float | None:
    rest = _number(header, "RESTWAV")
    frequency = _number(header, "RESTFRQ", "RESTFREQ")
    return rest or (C_M_S / frequency if frequency else None)


def velocity_to_wave(kind: str, value, rest: float):
    """Wavelength (unit of ``rest``) of a velocity-like coordinate, Paper III table 3.

    value in m/s (VRAD, VOPT, VELO) or dimensionless (ZOPT, BETA).
    """
    value = np.asarray(value, dtype=float)
    if kind == "ZOPT":
        return rest * (1.0 + value)
    beta = value if kind == "BETA" else value / C_M_S
    if kind == "VOPT":
        return rest * (1.0 + beta)
    if kind == "VRAD":
        return rest / (1.0 - beta)
    return rest * np.sqrt((1.0 + beta) / (1.0 - beta))


def _through_wcs(header, hdus, count: int, number: int) -> tuple[np.ndarray, str]:
    """(world coordinates, their unit); look-up tables keep their unit, others become SI."""
    from astropy.wcs import WCS, FITSFixedWarning

    with warnings.catch_warnings():
        warnings.simplefilter("ignore", FITSFixedWarning)
        wcs = WCS(header, hdus) if hdus is not None else WCS(header)
        pixels = np.zeros((count, wcs.naxis))
        pixels[:] = wcs.wcs.crpix - 1.0
        pixels[:, number - 1] = np.arange(count)
        values = wcs.all_pix2world(pixels, 0)[:, number - 1]
        return values, str(wcs.wcs.cunit[number - 1])


def _standard(header, hdus, count: int, number: int, what: str) -> Axis | None:
    code = str(header.get(f"CTYPE{number}", "")).upper().strip()
    kind = code[:4]
    if code[4:] in ("", "-LOG") and kind in _DEFAULT_UNIT:
        return _linear(header, count, number, kind, what)
    rest = _rest_wavelength(header)
    if kind not in _DEFAULT_UNIT and rest is None:
        _refuse_velocity(header, number, what)
        raise InputRefused(what, f"axis {code} has no rest wavelength", "add RESTWAV or RESTFRQ")
    values, stated = _through_wcs(header, hdus, count, number)
    if kind not in _DEFAULT_UNIT:
        unit, values = METRE, velocity_to_wave(kind, values, rest)
    else:
        unit = wave_unit(stated) or wave_unit(_DEFAULT_UNIT[kind])
    return Axis(values, unit, "air" if kind == "AWAV" else "vacuum", f"{code} axis")


def header_axis(header, count: int, what: str, number: int = 1, hdus=None) -> Axis | None:
    """The spectral axis ``number`` of ``count`` samples; None when the header has none.

    Raises InputRefused for a velocity axis without rest wavelength and for units that
    could mean several things.
    """
    code = str(header.get(f"CTYPE{number}", "")).upper().strip()
    if code[:4] in SPECTRAL_CODES and (len(code) == 4 or code[4:5] == "-"):
        return _standard(header, hdus, count, number, what)
    found = _coefficients(header, count) if number == 1 else None
    found = found or _flagged_log(header, count, number)
    if found is not None:
        return found
    _refuse_velocity(header, number, what)
    if code.split("[")[0].strip() not in _LINEAR_NAMES and wave_unit(code) is None:
        return None
    if code == "PIXEL":
        return None
    return _linear(header, count, number, "", what)
