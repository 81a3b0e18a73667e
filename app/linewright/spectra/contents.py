"""Every spectrum a file offers, so that one can be chosen with --hdu, --row or --columns.

Only headers and column names are looked at; no data are read.
"""

from __future__ import annotations

import warnings
from dataclasses import asdict, dataclass

from ..errors import InputRefused, LinewrightError
from .axis import header_axis
from .columns import ColumnInfo, choose, role_of, scale_columns
from .fits_files import loaded
from .fits_images import images_of, named_rows
from .fits_tables import column_infos
from .opening import Opened, open_checked


@dataclass(frozen=True)
class Offer:
    """One place in a file: hdu (FITS HDU from 0, VOTable table from 1) or None; rows to
    choose among with --row (1 where there is no choice); samples of each; words."""

    hdu: int | None
    rows: int
    samples: int
    words: str


def contents(path) -> tuple[Offer, ...]:
    """What the file offers, in its order. Raises InputRefused for what cannot be opened."""
    opened = open_checked(path)
    try:
        if opened.kind == "fits":
            return _fits(opened)
        return _votable(opened) if opened.kind == "votable" else _text(opened)
    except LinewrightError:
        raise
    except Exception as problem:  # as in reading: other libraries fail in many ways
        words = " ".join(str(problem).split())[:120] or type(problem).__name__
        raise InputRefused(opened.path, f"damaged or unusual content ({words})",
                           "fetch the file again") from None


def as_data(offers: tuple[Offer, ...]) -> list[dict]:
    """The offers as plain JSON values."""
    return [asdict(offer) for offer in offers]


def _fits(opened: Opened) -> tuple[Offer, ...]:
    from astropy.io import fits

    offers: list[Offer] = []
    with warnings.catch_warnings(), opened.stream() as stream:
        warnings.simplefilter("ignore")
        with fits.open(stream, memmap=opened.data is None) as whole:
            hdus = loaded(whole)
            images = images_of(hdus)
            for index, hdu in enumerate(hdus):
                offer = _table(hdu, index) if getattr(hdu, "columns", None) is not None and not (
                    hdu.is_image) else _image(images, index, opened)
                if offer is not None:
                    offers.append(offer)
    return tuple(offers)


def _label(hdu, index: int) -> str:
    return f"HDU {index}" + (f" '{hdu.name}'" if hdu.name and hdu.name != "PRIMARY" else "")


def _table(hdu, index: int) -> Offer | None:
    infos, rows = column_infos(hdu), int(hdu.header["NAXIS2"])
    roles = choose(infos, None, "")
    scale = None if roles else scale_columns(infos)
    flux = roles.flux if roles else scale[2] if scale else None
    if flux is None or rows == 0:
        return None
    length = infos[flux].length
    words = f"{_label(hdu, index)}, table, flux={infos[flux].name}"
    if length == 1:
        return Offer(index, 1, rows, words) if rows > 1 else None
    return Offer(index, rows, length, f"{words}, vector cells")


def _image(images, index: int, opened: Opened) -> Offer | None:
    image = next((i for i in images if i.index == index), None)
    if image is None or image.role not in ("flux", "") or len(image.shape) > 3:
        return None
    beside = any(i.role == "wave" and i.shape in (image.shape, image.shape[-1:]) for i in images)
    try:
        found = beside or header_axis(image.hdu.header, image.shape[-1], opened.path) is not None
    except InputRefused:
        return None
    if not found:
        return None
    rows = 1
    for size in image.shape[:-1]:
        rows *= size
    named = rows > 1 and named_rows(image.hdu.header, rows)
    return Offer(index, 1 if named or beside and rows == 1 else rows, image.shape[-1],
                 f"{image.label}, image" + (", rows with names" if named else ""))


def _votable(opened: Opened) -> tuple[Offer, ...]:
    from .astropy_tables import read_votable

    offers = []
    for number, view in enumerate(read_votable(opened, None), start=1):
        roles = choose(view.infos, None, "")
        if roles is not None:
            length = view.infos[roles.flux].length
            rows, samples = (1, view.rows) if length == 1 else (view.rows, length)
            offers.append(Offer(number, rows, samples, f"{view.where}, "
                                f"flux={view.infos[roles.flux].name}"))
    return tuple(offers)


def _text(opened: Opened) -> tuple[Offer, ...]:
    """Columns that could be another flux."""
    from .astropy_tables import is_ecsv, read_ecsv
    from .text import read_table

    if is_ecsv(opened):
        view = read_ecsv(opened)
        infos, rows = view.infos, view.rows
    else:
        data, infos, _, _ = read_table(opened)
        rows = len(data)
    waves = [i for i, info in enumerate(infos) if role_of(info) == "wave"]
    if not waves:
        return ()
    return tuple(
        Offer(None, 1, rows, f"--columns wave={waves[0] + 1},flux={i + 1}: {_name(info, i)}")
        for i, info in enumerate(infos) if role_of(info) in ("", "flux") and info.numeric)


def _name(info: ColumnInfo, index: int) -> str:
    return f"flux={info.name or f'column {index + 1}'}"
