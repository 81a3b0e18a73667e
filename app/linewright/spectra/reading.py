"""Open a reduced spectrum and say what was understood.

``read_spectrum`` is the one entrance: layouts deliver ``Raw``, statements decide medium
and frame, cleaning makes frozen segments. Whatever is wrong with a file ends as one
InputRefused with its cause and cure.
"""

from __future__ import annotations

from dataclasses import replace
from typing import TypedDict, Unpack

import numpy as np

from ..errors import InputRefused, LinewrightError
from .clean import clean_segments
from .columns import parse_columns
from .coverage import gap_steps
from .earth_motion import corrected, zero_point_removed
from .medium import AIR_LIMIT
from .observation import observation_of
from .opening import Opened, check_unchanged, open_checked
from .raw import Card, Raw, Wanted
from .spectrum import FRAMES, MEDIA, Spectrum
from .statements import Known, known_of
from .units import required_unit


def _read_text(opened: Opened, wanted: Wanted) -> Raw:
    from .tables import TableView, raw_from_table
    from .text import read_table

    data, infos, comments, notes = read_table(opened)
    cards = tuple(Card("COMMENT", line) for line in comments)
    view = TableView("text", infos, len(data), lambda i: data[:, i], cards, notes=tuple(notes))
    raw = raw_from_table(view, wanted, opened.path)
    if raw is not None:
        return raw
    return _text_without_flux_name(view, wanted, opened)


def _text_without_flux_name(view, wanted: Wanted, opened: Opened) -> Raw:
    """A header names the wavelength but calls no column flux: the first other one is read."""
    from .columns import role_of
    from .tables import raw_from_table

    waves = [i for i, info in enumerate(view.infos) if role_of(info) == "wave"]
    if waves and not wanted.columns and len(view.infos) > 1:
        other = 0 if waves[0] != 0 else 1
        chosen = {"wave": waves[0] + 1, "flux": other + 1}
        note = (f"no column is called flux: column {other + 1} '{view.infos[other].name}' read "
                f"(choose with --columns)")
        raw = raw_from_table(view, replace(wanted, columns=chosen), opened.path)
        return replace(raw, warnings=(*raw.warnings, note))
    names = ", ".join(i.name or str(n) for n, i in enumerate(view.infos[:12], start=1))
    raise InputRefused(opened.path, f"cannot tell wavelength and flux among columns {names}",
                       "choose with --columns wave=1,flux=2")


def _read_astropy_table(opened: Opened, wanted: Wanted) -> Raw:
    from .astropy_tables import read_ecsv, read_votable
    from .tables import raw_from_table

    if opened.kind == "votable":
        views = read_votable(opened, wanted.hdu)
    else:
        views = [read_ecsv(opened)]
    for view in views:
        raw = raw_from_table(view, wanted, opened.path)
        if raw is not None:
            return raw
    names = ", ".join(i.name for v in views[:1] for i in v.infos[:12])
    raise InputRefused(opened.path, f"cannot tell wavelength and flux among columns {names}",
                       "choose with --columns wave=NAME,flux=NAME")


def _read_raw(opened: Opened, wanted: Wanted) -> Raw:
    from .astropy_tables import is_ecsv

    if opened.kind == "fits":
        from .plain_fits import read_plain

        raw = read_plain(opened, wanted)
        if raw is not None:
            return raw
        from .fits_files import read_fits

        return read_fits(opened, wanted)
    if opened.kind == "votable" or is_ecsv(opened):
        return _read_astropy_table(opened, wanted)
    return _read_text(opened, wanted)


def _guarded(opened: Opened, wanted: Wanted) -> Raw:
    """Readers of other libraries raise anything on damaged files: always one refusal."""
    try:
        return _read_raw(opened, wanted)
    except LinewrightError:
        raise
    except MemoryError:
        raise InputRefused(opened.path, "needs more memory than there is",
                           "cut out the range you need") from None
    except Exception as problem:  # the boundary: astropy and numpy fail in many ways
        words = " ".join(str(problem).split())[:160] or type(problem).__name__
        raise InputRefused(opened.path, f"damaged or unusual {opened.kind} content ({words})",
                           "fetch the file again or save it as a plain table") from None


def _decided(raw: Raw, medium, frame) -> Known:
    known = known_of(raw)
    if medium is None and known.medium != "vacuum" and _highest(raw) <= AIR_LIMIT:
        known = replace(known, medium="vacuum", medium_from="below 2000 A vacuum by convention")
    notes = list(known.warnings)
    for asked, stated, name in ((medium, known.medium, "medium"), (frame, known.frame, "frame")):
        if asked and stated not in ("unknown", asked):
            notes.append(f"{name} {asked} given, but the file says {stated}")
    if medium is not None:
        known = replace(known, medium=medium, medium_from="given by the user")
    if frame is not None:
        known = replace(known, frame=frame, frame_from="given by the user")
    return replace(known, warnings=tuple(notes))


def _highest(raw: Raw) -> float:
    highest = 0.0
    for segment in raw.segments:
        with np.errstate(all="ignore"):
            wave = raw.unit.to_angstrom(np.asarray(segment.wave, dtype=float))
        highest = max(highest, float(np.max(wave, initial=0.0, where=np.isfinite(wave))))
    return highest


def _scattered(segments) -> bool:
    """True when one step in thirty is a gap: a list of lines rather than a spectrum.

    Random positions have exponential steps: 9 % exceed 3.5 medians.
    """
    samples = sum(len(s.wave) for s in segments)
    return samples < 20000 and 30 * sum(len(gap_steps(s)) for s in segments) > samples


def _resolution(raw: Raw) -> float | None:
    """Resolving power where a header states it (SPEC_RES, SPECRES, RESOLVPW)."""
    for card in raw.cards:
        if card.key.upper() in ("SPEC_RES", "SPECRES", "RESOLVPW") and isinstance(
                card.value, (int, float)) and 50 < card.value < 1e7:
            return float(card.value)
    return None


class Choices(TypedDict, total=False):
    """What a reader may be told; everything left out is taken from the file.

    medium: 'air' or 'vacuum'; frame: one of FRAMES
    hdu: FITS HDU from 0, VOTable table from 1; row: of an image or of vector cells, from 1
    columns: mapping or 'wave=1,flux=2,err=3' of wave, flux, err, ivar, mask to numbers
        from 1 or names
    unit: of the wavelengths, as in a file
    zero_point: (km/s, error) of telluric or sky lines, taken out of the wavelengths
    barycentric, heliocentric: km/s to apply once, lambda (1 + v/c); never on top of another
    """

    medium: str | None
    frame: str | None
    hdu: int | None
    row: int | None
    columns: str | dict | None
    unit: str | None
    zero_point: tuple[float, float] | None
    barycentric: float | None
    heliocentric: float | None


def _given(choices: dict) -> dict:
    unknown = sorted(set(choices) - set(Choices.__annotations__))
    if unknown:
        raise TypeError(f"read_spectrum() has no choice '{unknown[0]}'")
    given = {key: value for key, value in choices.items() if value is not None}
    if "columns" in given:
        given["columns"] = parse_columns(given["columns"])
    if given.get("medium", "air") not in MEDIA[1:]:
        raise InputRefused("--medium", f"'{given['medium']}' is no medium", "use air or vacuum")
    if given.get("frame", "rest") not in FRAMES:
        raise InputRefused("--frame", f"'{given['frame']}' is no frame",
                           f"use {', '.join(FRAMES[1:])}")
    return given


def read_spectrum(path, **choices: Unpack[Choices]) -> Spectrum:
    """Read one spectrum from FITS (images, tables), VOTable, ECSV or text, plain or packed.

    Keywords ``medium, frame, hdu, row, columns, unit`` (see Choices) override what the
    file says. Wavelengths become vacuum Angstrom; ``read_options`` of the result keeps
    what is needed to read the same again. Raises InputRefused, in one line, for whatever
    is no spectrum.
    """
    given = _given(dict(choices))
    unit = given.get("unit")
    wanted = Wanted(given.get("hdu"), given.get("row"), given.get("columns"),
                    None if unit is None else required_unit(unit))
    opened = open_checked(path)
    raw = _guarded(opened, wanted)
    check_unchanged(opened)
    known = _decided(raw, given.get("medium"), given.get("frame"))
    segments, notes = clean_segments(raw.segments, raw.unit, known.medium, opened.path)
    if _scattered(segments):
        notes.append("the samples are scattered like a list of features: to identify a feature "
                     "table use --features")
    spectrum = Spectrum(
        segments, known.medium, known.medium_from, known.frame, known.frame_from,
        raw.flux_unit, raw.name, str(opened.path), opened.checksum.hex(),
        raw.layout + (f" ({opened.packing})" if opened.packing else ""),
        known.corrections, (*raw.warnings, *known.warnings, *notes), _resolution(raw),
        {**raw.choices, **{k: v for k, v in given.items() if k not in _MOVES}},
        known.observer_velocity, observation_of(raw.cards),
    )
    return _moved(spectrum, given)


_MOVES = ("zero_point", "barycentric", "heliocentric")


def _moved(spectrum: Spectrum, given: dict) -> Spectrum:
    """The zero point is taken out first, in the observer's frame; then one correction."""
    if "zero_point" in given:
        spectrum = zero_point_removed(spectrum, *map(float, given["zero_point"]))
    for kind in _MOVES[1:]:
        if kind in given:
            spectrum = corrected(spectrum, float(given[kind]), kind)
    return spectrum
