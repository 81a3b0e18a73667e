"""Spectra written as standard FITS and ECSV tables that other standard readers open.

One row a sample: ``wavelength`` (Angstrom, in the spectrum's own medium, with the UCD that
says which), ``flux``, ``uncertainty`` (one sigma) and ``mask`` (true = do not use) where
known, ``segment`` where there are several. Keywords say medium, frame and corrections.
"""

from __future__ import annotations

import io
import re
import warnings
from pathlib import Path

import numpy as np

from ..errors import InputRefused
from ..session.atomic import check_writable, write_atomically
from ..spectra.medium import to_medium
from ..spectra.spectrum import Spectrum

SUFFIXES = (".fits", ".ecsv")
_SPECSYS = {"topocentric": "TOPOCENT", "geocentric": "GEOCENTR", "heliocentric": "HELIOCEN",
            "barycentric": "BARYCENT", "rest": "SOURCE"}
_UCD = {"air": "em.wl;obs.atmos", "vacuum": "em.wl"}
DESCRIPTIONS = {
    "wavelength": "wavelength in {medium}", "flux": "flux", "uncertainty": "one sigma of the flux",
    "mask": "true: do not use this sample", "segment": "number of the order or detector, from 0",
}


def check_spectrum_suffix(path) -> str:
    """The suffix, lower case; InputRefused unless a spectrum can be written so."""
    suffix = Path(path).suffix.lower()
    if suffix not in SUFFIXES:
        raise InputRefused(path, f"no spectrum format '{suffix}'", f"use {', '.join(SUFFIXES)}")
    return suffix


def _columns(spectrum: Spectrum) -> dict[str, np.ndarray]:
    parts = spectrum.segments
    columns = {
        "wavelength": to_medium(np.concatenate([p.wave for p in parts]), spectrum.medium),
        "flux": np.concatenate([p.flux for p in parts]),
    }
    if any(p.uncertainty is not None for p in parts):
        columns["uncertainty"] = np.concatenate([
            np.full(len(p.wave), np.nan) if p.uncertainty is None else p.uncertainty
            for p in parts])
    mask = np.concatenate([p.mask for p in parts])
    if mask.any():
        columns["mask"] = mask
    if len(parts) > 1:
        columns["segment"] = np.repeat(np.arange(len(parts), dtype=np.int32),
                                       [len(p.wave) for p in parts])
    return columns


def _spelt(text: str) -> str:
    """The unit as astropy spells it: '1E-17 erg/cm^2/s/Ang' is 10**-17 erg/cm^2/s/Angstrom."""
    text = re.sub(r"^\s*1?\.?0*[eE]([-+]?\d+)\s*\*?\s*", r"10**\1 ", text)
    text = re.sub(r"^\s*10\^?\(?([-+]\d+)\)?\s*\*?\s*", r"10**\1 ", text)
    text = re.sub(r"\bAng(?:s|stroms?|str)?\b|\bAA\b", "Angstrom", text)
    return re.sub(r"\bFLAM\b", "erg / (s cm2 Angstrom)", text)


def _flux_unit(text: str):
    """(astropy unit or None, words for a comment) of the file's own spelling."""
    from astropy import units as u

    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        for known in (text, _spelt(text), text.lower()):
            try:
                unit = u.Unit(known)
                unit.to_string("fits")
                return (unit, "") if known.strip() else (None, "")
            except (ValueError, TypeError):
                continue
    return None, text


def _statements(spectrum: Spectrum) -> dict[str, tuple[object, str]]:
    """FITS keyword: (value, comment)."""
    stated: dict[str, tuple[object, str]] = {"VOCLASS": ("Spectrum V1.0", "data model")}
    if spectrum.name:
        stated["OBJECT"] = (spectrum.name, "target")
    if spectrum.medium != "unknown":
        stated["MEDIUM"] = (spectrum.medium, "medium of the wavelengths")
    if spectrum.frame in _SPECSYS:
        stated["SPECSYS"] = (_SPECSYS[spectrum.frame], "frame of the wavelengths")
    if np.isfinite(spectrum.observer_velocity):
        stated["VCORR"] = (spectrum.observer_velocity,
                           "[km/s] correction applied: lambda (1 + v/c)")
    if spectrum.resolution:
        stated["SPEC_RES"] = (spectrum.resolution, "resolving power")
    return stated


def _table(spectrum: Spectrum):
    """(astropy Table with units, descriptions and UCDs, words about an unwritable unit)."""
    from astropy.table import Table

    table = Table(_columns(spectrum), copy=False)
    unit, words = _flux_unit(spectrum.flux_unit)
    for name in table.colnames:
        table[name].description = DESCRIPTIONS[name].format(medium=f"{spectrum.medium} medium" if
                                                            spectrum.medium == "unknown"
                                                            else spectrum.medium)
    table["wavelength"].unit = "Angstrom"
    for name in ("flux", "uncertainty"):
        if name in table.colnames and unit is not None:
            table[name].unit = unit
    return table, words


def _ascii(text: str) -> str:
    return text.encode("ascii", "replace").decode("ascii")


def _fits(spectrum: Spectrum) -> bytes:
    from astropy.io import fits

    table, words = _table(spectrum)
    primary, hdu = fits.PrimaryHDU(), fits.BinTableHDU(table, name="SPECTRUM")
    for header in (primary.header, hdu.header):
        for key, (value, comment) in _statements(spectrum).items():
            header[key] = (_ascii(value) if isinstance(value, str) else value, comment)
    for number, name in enumerate(table.colnames, start=1):
        hdu.header.comments[f"TTYPE{number}"] = table[name].description
    hdu.header["TUCD1"] = _UCD.get(spectrum.medium, "em.wl;meta.main")
    hdu.header["TUCD2"] = "phot.flux.density;em.wl"
    for line in spectrum.corrections:
        hdu.header.add_history(_ascii(line))
    if words:
        hdu.header.add_comment(_ascii(f"unit of the flux as found: {words}"))
    stream = io.BytesIO()
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        fits.HDUList([primary, hdu]).writeto(stream)
    return stream.getvalue()


def _ecsv(spectrum: Spectrum) -> bytes:
    table, words = _table(spectrum)
    table["wavelength"].meta["ucd"] = _UCD.get(spectrum.medium, "em.wl;meta.main")
    table.meta = {key: value for key, (value, _) in _statements(spectrum).items()}
    table.meta["corrections"] = list(spectrum.corrections)
    if words:
        table.meta["flux_unit_as_found"] = words
    text = io.StringIO()
    table.write(text, format="ascii.ecsv")
    return text.getvalue().encode("utf-8")


_WRITERS = {".fits": _fits, ".ecsv": _ecsv}


def spectrum_bytes(spectrum: Spectrum, suffix: str) -> bytes:
    """The file's bytes; the same spectrum gives the same bytes."""
    return _WRITERS[suffix](spectrum)


def write_spectrum(spectrum: Spectrum, path, force: bool = False) -> None:
    """Write as .fits or .ecsv, whole or not at all.

    Raises InputRefused for another suffix or an existing file (without force).
    """
    suffix = check_spectrum_suffix(path)
    check_writable(path, force)
    write_atomically(path, spectrum_bytes(spectrum, suffix), force)
