"""Spectra in FITS images: header axes, rows with roles, companion image HDUs."""

from __future__ import annotations

import re
from dataclasses import dataclass

import numpy as np

from ..errors import InputRefused
from .axis import header_axis
from .raw import Raw, RawSegment, Wanted
from .uncertainty import mask_from_flags, sigma_from_ivar
from .units import ANGSTROM, WaveUnit, guess_unit, wave_unit

_ROLE_WORDS = (
    ("other", r"sky|telluric|model|continuum|lsf|psf|wdisp|coeff|resol|backgr|profile|contam"),
    ("mask", r"mask|flag|qual|\bdq\b"),
    ("ivar", r"ivar|inverse|inv_?var|weight"),
    ("var", r"\bvar\b|variance|\bvari?\b"),
    ("err", r"err|sigma|noise|uncert|stddev|\bstat\b|\bunc\b|\bsig\b|rms"),
    ("wave", r"wave|lambda|\bwl\b|loglam|\blam\b"),
    ("flux", r"flux|spec|\bsci\b|count|intens|signal|data|net|\bobj"),
)


def role_of_words(text: str) -> str:
    """The role an image's or row's name or unit gives it; '' when it says nothing."""
    for role, pattern in _ROLE_WORDS:
        if re.search(pattern, text.lower()):
            return role
    return ""


@dataclass(frozen=True, eq=False)
class Image:
    """One image HDU's header facts (data are fetched only when used)."""

    index: int
    hdu: object
    shape: tuple[int, ...]
    role: str

    @property
    def label(self) -> str:
        name = str(self.hdu.name or "").strip()
        return f"HDU {self.index}" + (f" '{name}'" if name and name != "PRIMARY" else "")

    def data(self) -> np.ndarray:
        return np.asarray(self.hdu.data)


def images_of(hdus) -> list[Image]:
    """Image HDUs with data, with the role each name states."""
    found = []
    for index, hdu in enumerate(hdus):
        if not getattr(hdu, "is_image", False) or not getattr(hdu, "shape", ()):
            continue
        shape = tuple(int(n) for n in hdu.shape)
        while len(shape) > 1 and shape[0] == 1:
            shape = shape[1:]
        words = f"{'' if hdu.name == 'PRIMARY' else hdu.name} {hdu.header.get('BUNIT', '')}"
        words = re.sub(r"\berg\S*|\bper\b", " ", words)
        found.append(Image(index, hdu, shape, role_of_words(words)))
    return found


def _row_names(header, count: int) -> list[str]:
    """What the header calls each row of a two-dimensional image, '' where it does not."""
    for key in ("EXTEN0", "ROWS", "PLANES", "CONTENTS"):
        parts = [p.strip() for p in str(header.get(key, "")).split(",")]
        if len(parts) == count > 1 and role_of_words(parts[0]) == "flux":
            return parts
    for stem in ("ARRAY", "ROW", "BANDID", "NAME", "APID"):
        names = [str(header.get(f"{stem}{i}", "")) for i in range(1, count + 1)]
        if any(names):
            return names
    return [""] * count


def named_rows(header, count: int) -> bool:
    """Whether the header calls one of the rows flux."""
    return any(role_of_words(name) == "flux" for name in _row_names(header, count))


def _uncertainty(role: str, data) -> np.ndarray:
    if role == "ivar":
        return sigma_from_ivar(data)
    with np.errstate(invalid="ignore"):
        return np.sqrt(data) if role == "var" else np.asarray(data, dtype=float)


def _companion(images: list[Image], roles: tuple[str, ...], shape, near: int) -> Image | None:
    """The image of that role and shape closest after ``near``."""
    fitting = [i for i in images if i.role in roles and i.shape == shape]
    return min(fitting, key=lambda i: (i.index < near, abs(i.index - near)), default=None)


def _wave_unit_of(image: Image, wave, wanted: Wanted, what) -> tuple[WaveUnit, str]:
    if wanted.unit is not None:
        return wanted.unit, ""
    header = image.hdu.header
    for text in (header.get("BUNIT", ""), header.get("CUNIT1", "")):
        unit = wave_unit(str(text))
        if unit is not None:
            return unit, ""
    if re.search(r"log_?(10)?_?(lam|wave)", f"{image.hdu.name}".lower()):
        return wave_unit("log10(Angstrom)"), ""
    return guess_unit(np.ravel(wave), what)


def _rows(flux: np.ndarray) -> np.ndarray:
    return flux.reshape(-1, flux.shape[-1])


def _companion_wave(flux: Image, images: list[Image]) -> Image | None:
    return _companion(images, ("wave",), flux.shape, flux.index) or _companion(
        images, ("wave",), flux.shape[-1:], flux.index)


def _companion_arrays(flux: Image, images: list[Image], notes: list[str]):
    """(uncertainty rows or None, mask rows or None, words)."""
    sigma = mask = None
    words = ""
    error = _companion(images, ("err", "ivar", "var"), flux.shape, flux.index)
    if error is not None:
        sigma = _uncertainty(error.role, _rows(error.data()))
        words += f", {error.role} in {error.label}"
    flags = _companion(images, ("mask",), flux.shape, flux.index)
    if flags is not None:
        mask, note = mask_from_flags(_rows(flags.data()).ravel(), "", False)
        mask = None if mask is None else mask.reshape(_rows(flags.data()).shape)
        words += f", flags in {flags.label}"
        if note:
            notes.append(note.replace(" (--columns mask=NAME uses them)", ""))
    return sigma, mask, words


def from_companions(flux: Image, images: list[Image], wanted: Wanted, what) -> Raw | None:
    """Flux whose wavelengths stand in another image HDU; None when there is none."""
    wave_image = _companion_wave(flux, images)
    if wave_image is None:
        return None
    notes: list[str] = []
    waves, fluxes = _rows(wave_image.data()), _rows(flux.data())
    sigma, mask, words = _companion_arrays(flux, images, notes)
    unit, note = _wave_unit_of(wave_image, waves, wanted, what)
    chosen = list(range(len(fluxes)))
    if wanted.row is not None or (len(waves) == 1 and len(fluxes) > 1):
        chosen = [_row_index(wanted.row, len(fluxes), what)]
        words += f", row {chosen[0] + 1} of {len(fluxes)}"
    segments = tuple(
        RawSegment(waves[i if len(waves) > 1 else 0], fluxes[i],
                   None if sigma is None else sigma[i], None if mask is None else mask[i])
        for i in chosen
    )
    layout = f"FITS images: flux in {flux.label}, wavelength in {wave_image.label}{words}"
    axis_medium = ("vacuum", f"the axis is in {unit.name}") if unit.vacuum else None
    return Raw(segments, unit, layout, axis_medium=axis_medium,
               warnings=tuple(notes + ([note] if note else [])))


def _row_index(row: int | None, count: int, what) -> int:
    if row is None:
        return 0
    if not 1 <= row <= count:
        raise InputRefused(what, f"has no row {row} (rows 1 to {count})", "choose with --row")
    return row - 1


def _row_roles(header, rows: np.ndarray) -> dict[str, int]:
    """First row of each stated role; a row named as a mask counts once ('and' before 'or')."""
    roles: dict[str, int] = {}
    for index, name in enumerate(_row_names(header, len(rows))):
        role = role_of_words(name)
        if role and role not in roles:
            roles[role] = index
    return roles


def from_header(image: Image, images: list[Image], hdus, wanted: Wanted, what) -> Raw | None:
    """Flux with the wavelength axis in its header or in a named row; None without one."""
    header, notes = image.hdu.header, []
    if len(image.shape) > 3:
        return None
    axis = header_axis(header, image.shape[-1], what, hdus=hdus)
    if axis is None:
        return None
    rows = _rows(image.data())
    roles = _row_roles(header, rows) if len(rows) > 1 else {}
    words = ""
    if len(rows) > 1:
        at = _row_index(wanted.row, len(rows), what) if wanted.row or "flux" not in roles \
            else roles["flux"]
        named = wanted.row is None and "flux" in roles
        words = f", rows {', '.join(f'{r}={i + 1}' for r, i in roles.items())}" if named else (
            f", row {at + 1} of {len(rows)}")
        if not named and wanted.row is None:
            notes.append(f"first of {len(rows)} rows read (choose with --row)")
    else:
        at, named = 0, False
    sigma, mask = _row_extras(rows, roles if named else {}, notes)
    if not named and image.shape == rows.shape[-1:]:
        more_sigma, more_mask, more = _companion_arrays(image, images, notes)
        sigma = None if more_sigma is None else more_sigma[0]
        mask = None if more_mask is None else more_mask[0]
        words += more
    unit = wanted.unit or axis.unit
    medium = (axis.medium, f"axis type {header.get('CTYPE1')}") if axis.medium else None
    notes += [axis.note] if axis.note and wanted.unit is None else []
    wave, unit, source = _row_wave(rows, roles if named else {}, axis, unit)
    return Raw((RawSegment(wave, rows[at], sigma, mask),), unit,
               f"FITS image, {image.label}, {source}{words}", axis_medium=medium,
               warnings=tuple(notes))


def _row_extras(rows, roles: dict[str, int], notes: list[str]):
    sigma = mask = None
    for role in ("err", "ivar", "var"):
        if role in roles and sigma is None:
            sigma = _uncertainty(role, rows[roles[role]])
    if "mask" in roles:
        mask, note = mask_from_flags(rows[roles["mask"]], "", False)
        notes += [note.replace(" (--columns mask=NAME uses them)", "")] if note else []
    return sigma, mask


def _row_wave(rows, roles, axis, unit):
    """The axis of the header; a wavelength row only where single precision cannot hurt.

    A row in float32 holds a wavelength to 3e-8 at best, so the header's axis is kept when
    both agree to within that and the row is reported as confirming it.
    """
    if "wave" not in roles:
        return axis.values, unit, axis.words
    row = np.asarray(rows[roles["wave"]], dtype=float)
    header_wave = unit.to_angstrom(axis.values)
    if np.allclose(row, header_wave, rtol=2e-6, atol=0):
        return axis.values, unit, f"{axis.words}, confirmed by the wavelength row"
    return row, ANGSTROM, "wavelength row"
