"""Open a reduced spectrum and say what was understood.

``read_spectrum`` is the one entrance: layouts deliver ``Raw``, statements decide medium
and frame, cleaning makes frozen segments. Whatever is wrong with a file ends as one
InputRefused with its cause and cure.
"""

from __future__ import annotations

from dataclasses import replace

from ..errors import InputRefused, LinewrightError
from .clean import clean_segments
from .columns import parse_columns
from .medium import AIR_LIMIT
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


def _checked_options(medium, frame) -> None:
    if medium is not None and medium not in MEDIA[1:]:
        raise InputRefused("--medium", f"'{medium}' is no medium", "use air or vacuum")
    if frame is not None and frame not in FRAMES:
        raise InputRefused("--frame", f"'{frame}' is no frame", f"use {', '.join(FRAMES[1:])}")


def _decided(raw: Raw, medium, frame, highest: float) -> Known:
    known = known_of(raw)
    if medium is None and known.medium != "vacuum" and highest <= AIR_LIMIT:
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
    import numpy as np

    highest = 0.0
    for segment in raw.segments:
        with np.errstate(all="ignore"):
            wave = raw.unit.to_angstrom(np.asarray(segment.wave, dtype=float))
        wave = wave[np.isfinite(wave)]
        highest = max(highest, float(wave.max())) if wave.size else highest
    return highest


def _resolution(raw: Raw) -> float | None:
    """Resolving power where a header states it (SPEC_RES, SPECRES, RESOLVPW)."""
    for card in raw.cards:
        if card.key.upper() in ("SPEC_RES", "SPECRES", "RESOLVPW") and isinstance(
                card.value, (int, float)) and 50 < card.value < 1e7:
            return float(card.value)
    return None


def read_spectrum(path, *, medium=None, frame=None, hdu=None, row=None, columns=None,
                  unit=None) -> Spectrum:
    """Read one spectrum from FITS (images, tables), VOTable, ECSV or text, plain or packed.

    medium 'air' or 'vacuum', frame (see FRAMES), hdu (from 0; table number from 1 in a
    VOTable), row (from 1), columns (mapping or 'wave=1,flux=2,err=3', numbers from 1 or
    names) and unit (of the wavelengths) override what the file says; None takes it from
    the file. Wavelengths become vacuum Angstrom. Raises InputRefused, in one line, for
    whatever is no spectrum.
    """
    given = {"medium": medium, "frame": frame, "hdu": hdu, "row": row,
             "columns": parse_columns(columns), "unit": unit}
    _checked_options(medium, frame)
    wanted = Wanted(hdu, row, given["columns"], None if unit is None else required_unit(unit))
    opened = open_checked(path)
    raw = _guarded(opened, wanted)
    check_unchanged(opened)
    known = _decided(raw, medium, frame, _highest(raw))
    segments, notes = clean_segments(raw.segments, raw.unit, known.medium, opened.path)
    options = {k: v for k, v in {**raw.choices, **given}.items() if v is not None}
    return Spectrum(
        segments, known.medium, known.medium_from, known.frame, known.frame_from,
        raw.flux_unit, raw.name, str(opened.path), opened.sha256,
        raw.layout + (f" ({opened.packing})" if opened.packing else ""),
        known.corrections, (*raw.warnings, *known.warnings, *notes), _resolution(raw), options,
    )
