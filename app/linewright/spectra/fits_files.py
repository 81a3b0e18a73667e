"""FITS files: which HDU holds the spectrum, and what its headers state."""

from __future__ import annotations

import re
import warnings
from dataclasses import replace

import numpy as np

from ..errors import InputRefused
from .axis import SPECTRAL_CODES
from .fits_images import Image, from_companions, from_header, images_of
from .fits_tables import table_view
from .opening import Opened, check_fits_header
from .raw import Card, Raw, Wanted
from .tables import raw_from_table


MOST_HDUS = 400


def _cards(header) -> list[Card]:
    """Every statement that can be parsed; a damaged card of no concern stops nothing."""
    from astropy.io.fits import VerifyError

    cards = []
    for card in header.cards:
        try:
            cards.append(Card(card.keyword, card.value, card.comment))
        except (VerifyError, ValueError):
            continue
    return cards


def _statements(hdus, index: int) -> tuple[Card, ...]:
    own = _cards(hdus[index].header) if index else []
    stated = {c.key for c in own if c.key not in ("", "COMMENT", "HISTORY")}
    return tuple([c for c in _cards(hdus[0].header) if c.key not in stated] + own)


def _from_image(hdus, images: list[Image], index: int, wanted: Wanted, what) -> Raw | None:
    image = next((i for i in images if i.index == index), None)
    if image is None:
        return None
    asked = wanted.hdu is not None
    if not asked and image.role not in ("flux", ""):
        return None
    return from_companions(image, images, wanted, what) or from_header(
        image, images, hdus, wanted, what)


def _candidate(hdus, images, index: int, wanted: Wanted, opened: Opened) -> Raw | None:
    hdu = hdus[index]
    if getattr(hdu, "columns", None) is not None and not hdu.is_image:
        view = table_view(hdus, index, opened, _statements(hdus, index))
        return raw_from_table(view, wanted, opened.path)
    raw = _from_image(hdus, images, index, wanted, opened.path)
    if raw is None:
        return None
    unit = re.sub(r"^[A-Za-z ]+\((.*)\)$", r"\1", str(hdu.header.get("BUNIT", "")).strip())
    return Raw(raw.segments, raw.unit, raw.layout, unit, "", raw.axis_medium,
               _statements(hdus, index), raw.warnings)


def _first(hdus, wanted: Wanted, opened: Opened) -> tuple[int, Raw]:
    """(HDU index, Raw) of the first whole HDU that holds a spectrum, or of the one asked for."""
    cut = _incomplete(hdus, opened)
    images = [i for i in images_of(hdus) if i.index not in cut]
    refusals = list(cut.values())
    order = range(len(hdus)) if wanted.hdu is None else [wanted.hdu]
    for index in order:
        if index in cut:
            continue
        try:
            raw = _candidate(hdus, images, index, wanted, opened)
        except InputRefused as refusal:
            if wanted.hdu is not None:
                raise
            refusals.append(refusal)
            continue
        if raw is not None:
            notes = tuple(f"HDU {i} is truncated and was left out" for i in cut)
            return index, replace(raw, warnings=(*raw.warnings, *notes))
    if refusals:
        raise refusals[0]
    raise _nothing_found(hdus, wanted, opened.path)


def _nothing_found(hdus, wanted: Wanted, what) -> InputRefused:
    where = "no HDU" if wanted.hdu is None else f"HDU {wanted.hdu}"
    if len(hdus) == 1 and not getattr(hdus[0], "shape", ()):
        return InputRefused(what, "is a FITS header without data", "give the file with its data")
    for hdu in hdus:
        if getattr(hdu, "is_image", False) and len(getattr(hdu, "shape", ())) > 1:
            codes = {n: str(hdu.header.get(f"CTYPE{n}", "")).upper()[:4] for n in (2, 3, 4)}
            spectral = [n for n, code in codes.items() if code in SPECTRAL_CODES]
            if spectral:
                return InputRefused(
                    what, f"is an image or cube with its wavelengths along axis {spectral[0]}",
                    "extract a one-dimensional spectrum first")
    return InputRefused(what, f"{where} holds a spectrum with a wavelength axis or column",
                        "choose with --hdu or --columns, or save wavelength and flux as a table")


def _others(hdus, chosen: int) -> int:
    """Other table HDUs shaped like the chosen one (single exposures and the like)."""
    names = getattr(hdus[chosen], "columns", None)
    if names is None:
        return 0
    wave_like = set(names.names[:2])
    return sum(1 for i, h in enumerate(hdus) if i != chosen and getattr(h, "columns", None)
               is not None and not h.is_image and wave_like <= set(h.columns.names))


def _incomplete(hdus, opened: Opened) -> dict[int, InputRefused]:
    """HDUs whose data end after the file does, with the refusal each deserves."""
    cut = {}
    for index, hdu in enumerate(hdus):
        info = hdu.fileinfo()
        end = info["datLoc"] + (hdu.size or 0) if info else 0
        if end > opened.size:
            cut[index] = InputRefused(
                opened.path, f"is truncated or has a false size: HDU {index} needs {end} bytes, "
                f"the file has {opened.size}", "fetch the file again")
    return cut


def _check_hdu(hdus, hdu: int | None, what) -> None:
    if hdu is not None and not 0 <= hdu < len(hdus):
        raise InputRefused(what, f"has no HDU {hdu} (HDUs 0 to {len(hdus) - 1})",
                           "choose with --hdu")


def loaded(whole):
    """The first MOST_HDUS HDUs of an open file: a file of thousands must not hang us."""
    from astropy.io import fits

    hdus = []
    for index in range(MOST_HDUS):
        try:
            hdus.append(whole[index])
        except IndexError:
            break
    return fits.HDUList(hdus)


def read_fits(opened: Opened, wanted: Wanted) -> Raw:
    """The spectrum of a FITS file (arrays copied, the file closed).

    Raises InputRefused when no HDU holds one or the file is incomplete.
    """
    check_fits_header(opened)
    from astropy.io import fits

    with warnings.catch_warnings(), opened.stream() as stream:
        warnings.simplefilter("ignore")
        with fits.open(stream, memmap=opened.data is None) as whole:
            hdus = loaded(whole)
            _check_hdu(hdus, wanted.hdu, opened.path)
            index, raw = _first(hdus, wanted, opened)
            others = _others(hdus, index)
            layout = raw.layout + (f"; {others} more HDUs of this kind (choose with --hdu)"
                                   if others and wanted.hdu is None else "")
            name = str(hdus[index].header.get("OBJECT", "") or hdus[0].header.get("OBJECT", ""))
            return Raw(tuple(_copied(s) for s in raw.segments), raw.unit, layout, raw.flux_unit,
                       name, raw.axis_medium, raw.cards, raw.warnings, {"hdu": index})


def _copied(segment):
    """Native-endian arrays that outlive the file; what already is so is not copied again."""
    def native(array, kind=np.dtype(float)):
        if array is None or (array.base is None and array.dtype == kind):
            return array
        return np.array(array, dtype=kind)

    mask = native(segment.mask, np.dtype(bool))
    return type(segment)(native(segment.wave), native(segment.flux),
                         native(segment.uncertainty), mask)
