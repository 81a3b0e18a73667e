"""The plainest FITS files, read without loading a library: one image of one dimension.

A third of a second of imports stands between such a file and its picture otherwise. Whatever
is not entirely plain (extensions, scaling, long strings, undefined values, world coordinates
beyond linear and -LOG axes, a wrong length) is left to the full reader, refusals included.
Header and data layout: FITS Standard 4.0, sections 3.3, 4.1 and 4.2.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, replace

import numpy as np

from .fits_images import Image, from_header, role_of_words
from .opening import Opened
from .raw import Card, Raw, Wanted

_BLOCK, _CARD = 2880, 80
_MOST_BLOCKS = 200
_KINDS = {8: ">u1", 16: ">i2", 32: ">i4", 64: ">i8", -32: ">f4", -64: ">f8"}
_FREE_TEXT = ("COMMENT", "HISTORY", "")
_STRING = re.compile(r"\s*'((?:[^']|'')*)'\s*(?:/\s?(.*))?$")
_NUMBER = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[EeDd][+-]?\d+)?$")
_NOT_PLAIN = ("CONTINUE", "BSCALE", "BZERO", "BLANK", "GROUPS", "XTENSION")


class NotPlain(Exception):
    """The full reader must look at this file."""


@dataclass(frozen=True, eq=False)
class _Hdu:
    """What ``fits_images`` asks of an HDU."""

    header: dict
    data: np.ndarray
    name: str = "PRIMARY"


def read_plain(opened: Opened, wanted: Wanted) -> Raw | None:
    """The spectrum of a plain file; None where the full reader must look."""
    if wanted.hdu not in (None, 0) or wanted.row is not None or wanted.columns:
        return None
    try:
        with opened.stream() as stream:
            cards, start = _header(stream)
            header = _as_mapping(cards)
            flux = _data(stream, header, start, opened.size)
    except (NotPlain, ValueError, UnicodeDecodeError):
        return None
    words = re.sub(r"\berg\S*|\bper\b", " ", str(header.get("BUNIT", "")))
    image = Image(0, _Hdu(header, flux), flux.shape, role_of_words(words))
    if image.role not in ("flux", ""):
        return None
    raw = from_header(image, [image], None, wanted, opened.path)
    if raw is None:
        return None
    unit = re.sub(r"^[A-Za-z ]+\((.*)\)$", r"\1", str(header.get("BUNIT", "")).strip())
    return replace(raw, flux_unit=unit, name=str(header.get("OBJECT", "") or ""), cards=cards,
                   choices={"hdu": 0})


def _header(stream) -> tuple[tuple[Card, ...], int]:
    """(cards, offset of the data). Raises NotPlain for any card that is not."""
    cards: list[Card] = []
    for count in range(1, _MOST_BLOCKS + 1):
        block = stream.read(_BLOCK)
        if len(block) < _BLOCK:
            raise NotPlain
        text = block.decode("ascii")
        for at in range(0, _BLOCK, _CARD):
            line = text[at : at + _CARD]
            if line.rstrip() == "END":
                return tuple(cards), count * _BLOCK
            cards.append(_card(line))
    raise NotPlain


def _card(line: str) -> Card:
    key = line[:8].rstrip()
    if line[:9] == "HIERARCH ":
        key, found, rest = line[9:].partition("=")
        key = key.strip()
        if not found or not key or key.upper() != key:
            raise NotPlain
    elif key in _FREE_TEXT:
        return Card(key, line[8:].rstrip(), "")
    elif line[8:10] != "= " or any(line.startswith(word) for word in _NOT_PLAIN):
        raise NotPlain
    else:
        rest = line[10:]
    return Card(key, *_value(rest))


def _value(text: str) -> tuple[object, str]:
    """(value, comment) of what follows the equals sign."""
    string = _STRING.match(text)
    if string:
        return string.group(1).replace("''", "'").rstrip(), (string.group(2) or "").rstrip()
    said, _slash, comment = text.partition("/")
    said, comment = said.strip(), comment.strip()
    if said in ("T", "F"):
        return said == "T", comment
    if not _NUMBER.match(said):
        raise NotPlain
    whole = said.lstrip("+-").isdigit()
    return (int(said) if whole else float(said.upper().replace("D", "E"))), comment


def _as_mapping(cards: tuple[Card, ...]) -> dict:
    """First value of each keyword, as the full reader answers."""
    header: dict = {}
    for card in cards:
        if card.key not in _FREE_TEXT:
            header.setdefault(card.key, card.value)
    for key, value in header.items():
        if key.startswith("CTYPE") and "-" in str(value) and not str(value).endswith("-LOG"):
            raise NotPlain
    return header


def _data(stream, header: dict, start: int, size: int) -> np.ndarray:
    if header.get("SIMPLE") is not True or header.get("BITPIX") not in _KINDS:
        raise NotPlain
    axes = [header.get(f"NAXIS{n}") for n in range(1, int(header.get("NAXIS", 0)) + 1)]
    if len(axes) != 1 or not isinstance(axes[0], int) or axes[0] < 2:
        raise NotPlain
    kind = np.dtype(_KINDS[header["BITPIX"]])
    length = axes[0] * kind.itemsize
    if start + -(-length // _BLOCK) * _BLOCK != size:
        raise NotPlain
    stream.seek(start)
    return np.frombuffer(stream.read(length), dtype=kind).astype(float)
