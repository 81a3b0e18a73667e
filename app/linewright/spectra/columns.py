"""Which column is the wavelength, the flux, the error and the mask.

Order of trust: the user's choice, then utype and UCD (IVOA Spectrum), then the unit,
then the name.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from ..errors import InputRefused
from .units import LN_ANGSTROM, LOG10_ANGSTROM, WaveUnit, wave_unit

ROLES = ("wave", "flux", "err", "ivar", "mask")
_WAVE = re.compile(
    r"^(?:w(?:a|ave|avelength|avelengths|l|vl|vln|lam)?|lam|lambda|lamda|wave_?(?:air|vac\w*|obs)"
    r"|wavelength_?(?:air|vac\w*|obs)|lambda_?(?:air|vac\w*|obs)|awav|spectral_?(?:axis|value)?"
    r"|freq(?:uency)?|wavenumber|wavn|energy)$"
)
_LOG_WAVE = re.compile(r"^(?:log_?(?:10)?_?(?:lam|lambda|wave|wavelength|w|wl)|lnlam\w*|ln_wave)$")
_FLUX = re.compile(
    r"^(?:flux|f|flam|f_?lambda|fnu|spec|spectrum|counts|intensity|int|data|signal|sci"
    r"|flux_?(?:density|reduced|cal\w*|norm\w*|red)|norm\w*_?flux|normali[sz]ed|s1d|net|rel\w*_?flux)$"
)
_ERR = re.compile(
    r"^(?:e|err|error|errors|sig|sigma|sig_?flux|sigma_?flux|e_?flux|flux_?err(?:or)?|err_?flux"
    r"|error_?flux|noise|unc|uncert\w*|stat_?err(?:or)?|std|stdev|std_?dev|eflux|rms|dflux"
    r"|err_reduced|flux_?(?:unc\w*|sigma|sig|std))$"
)
_IVAR = re.compile(r"^(?:ivar|inv_?var\w*|invvar|inverse_?var\w*|flux_?ivar|ivar_?flux)$")
_UNIT_SUFFIX = re.compile(r"_(nm|um|angstroms?|ang|aa|a|microns?)$")
_START = re.compile(
    r"^(?:crval1?|w0|wl0|wave_?(?:0|start|min|begin)|(?:start|min|first)_?(?:wave|lambda|w|wl)"
    r"|lam(?:bda)?_?(?:0|start|min)|w_?start|start|coeff0)$")
_STEP = re.compile(
    r"^(?:cdelt1?|cd1_1|dw|wpc|d_?(?:wave|lambda|lam|wl)|(?:delta|step)_?(?:wave|lambda|lam|w)?"
    r"|(?:wave|lambda|lam|w|wl)_?(?:step|delta|inc)|disp(?:ersion)?|coeff1)$")
_MASK = re.compile(r"^(?:mask|bad|dq|qual|quality|flag|flags|data_?qual|data_?quality|and_?mask)$")


@dataclass(frozen=True)
class ColumnInfo:
    """What a table says about one column; ``length`` is samples per cell (1 = scalar)."""

    name: str
    unit: str = ""
    ucd: str = ""
    utype: str = ""
    comment: str = ""
    length: int = 1
    numeric: bool = True


@dataclass(frozen=True)
class Roles:
    """Column indices (0-based) by role, None where absent, and why the wave was taken."""

    wave: int
    flux: int
    err: int | None = None
    ivar: int | None = None
    mask: int | None = None
    mask_asked: bool = False


def parse_columns(columns) -> dict[str, int | str] | None:
    """A mapping, or 'wave=11,flux=2,err=3' (1-based numbers or names), as a dict."""
    if columns is None:
        return None
    if isinstance(columns, str):
        pairs = [part.split("=", 1) for part in columns.split(",") if part.strip()]
        if any(len(pair) != 2 for pair in pairs):
            raise InputRefused("--columns", f"'{columns}' is not understood",
                               "write wave=1,flux=2,err=3")
        columns = {key.strip(): value.strip() for key, value in pairs}
    chosen = {}
    for key, value in dict(columns).items():
        if key not in ROLES:
            raise InputRefused("--columns", f"'{key}' is no role", f"use {', '.join(ROLES)}")
        text = str(value)
        chosen[key] = int(text) if text.isdigit() else text
    return chosen


def _named_index(wanted: int | str, infos, what: str) -> int:
    if isinstance(wanted, int):
        if not 1 <= wanted <= len(infos):
            raise InputRefused(what, f"has no column {wanted} (columns 1 to {len(infos)})",
                               "choose with --columns")
        return wanted - 1
    for index, info in enumerate(infos):
        if info.name.lower() == wanted.lower():
            return index
    names = ", ".join(i.name for i in infos[:12] if i.name)
    raise InputRefused(what, f"has no column '{wanted}'", f"it has: {names or 'no names'}")


def _by_utype(info: ColumnInfo) -> str:
    utype, ucd = info.utype.lower(), info.ucd.lower()
    if "spectralaxis.value" in utype:
        return "wave"
    if "fluxaxis.value" in utype:
        return "flux"
    if "fluxaxis.accuracy.staterror" in utype:
        return "err"
    if "fluxaxis.accuracy.qualitystatus" in utype:
        return "mask"
    if ucd.startswith(("em.wl", "em.freq", "em.energy", "em.wavenumber")):
        return "wave"
    if ucd.startswith("stat.error") and "em." in ucd or ucd.startswith("stat.error;phot.flux"):
        return "err" if "em.wl" not in ucd.split(";")[:2] else ""
    if ucd.startswith(("phot.flux", "phot.fluence", "phot.count", "spect.continuum")):
        return "flux"
    return "mask" if ucd.startswith(("meta.code.qual", "meta.code.error")) else ""


def role_of(info: ColumnInfo) -> str:
    """The role its utype, UCD or name gives a column, '' for none."""
    if not info.numeric:
        return ""
    name = re.sub(r"[\[(].*$", "", info.name).strip().lower().replace("-", "_").replace(" ", "_")
    name = _UNIT_SUFFIX.sub("", name) if len(name) > 3 else name
    for role, pattern in (("ivar", _IVAR), ("err", _ERR), ("mask", _MASK), ("wave", _LOG_WAVE),
                          ("wave", _WAVE), ("flux", _FLUX)):
        if pattern.match(name):
            by_name = role
            break
    else:
        by_name = ""
    by_utype = _by_utype(info)
    return by_name if by_name == "ivar" else by_utype or by_name


def scale_columns(infos: list[ColumnInfo]) -> tuple[int, int, int] | None:
    """(start, step, flux) columns of a table that states a scale instead of wavelengths.

    The flux must have several samples a cell, start and step one each.
    """
    found: dict[str, int] = {}
    for index, info in enumerate(infos):
        name = info.name.strip().lower().replace("-", "_")
        if info.numeric and info.length == 1:
            for role, pattern in (("start", _START), ("step", _STEP)):
                if pattern.match(name):
                    found.setdefault(role, index)
        elif role_of(info) == "flux":
            found.setdefault("flux", index)
    if {"start", "step", "flux"} <= set(found):
        return found["start"], found["step"], found["flux"]
    return None


def column_unit(info: ColumnInfo) -> WaveUnit | None:
    """The wavelength unit a column states by unit or name; None if it does not."""
    name = info.name.lower()
    if _LOG_WAVE.match(name):
        return LN_ANGSTROM if name.startswith("ln") else LOG10_ANGSTROM
    if info.unit:
        return wave_unit(info.unit)
    inside = re.search(r"[\[(]([^\])]+)[\])]", info.name)
    if inside:
        return wave_unit(inside.group(1))
    suffix = _UNIT_SUFFIX.search(name)
    return wave_unit(suffix.group(1)) if suffix else None


def choose(infos: list[ColumnInfo], wanted: dict | None, what: str) -> Roles | None:
    """Roles for a table with these columns; None when it holds no spectrum.

    Raises InputRefused when the user's choice does not fit.
    """
    found = {}
    for index, info in enumerate(infos):
        role = role_of(info)
        if role and role not in found:
            found[role] = index
    if "wave" not in found:
        for index, info in enumerate(infos):
            if info.numeric and info.unit and index not in found.values() and wave_unit(info.unit):
                found["wave"] = index
                break
    wanted = wanted or {}
    if "err" in wanted or "ivar" in wanted:
        found.pop("err", None)
        found.pop("ivar", None)
    for role, value in wanted.items():
        found[role] = _named_index(value, infos, what)
    if "wave" not in found or "flux" not in found:
        return None
    return Roles(found["wave"], found["flux"], found.get("err"), found.get("ivar"),
                 found.get("mask"), "mask" in wanted)
