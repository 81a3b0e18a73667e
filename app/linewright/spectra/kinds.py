"""Kinds of files whose conventions are documented by their observatory, not their header.

Each rule names what it recognises and what the documentation of that data product says. The
conventions were written from memory of those documents. For the first three, lines of a real
file confirm medium and frame (telluric lines at the stated correction, stellar lines at the
stated velocity: tests/published); CALSPEC rests on memory alone.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

from .raw import Card


@dataclass(frozen=True)
class Kind:
    """A recognised data product.

    correction_keys: header keywords (upper case) of the Earth-motion correction, km/s
    """

    words: str
    matches: Callable[[dict, str], bool]
    medium: str = ""
    frame: str = ""
    correction_keys: tuple[str, ...] = ()


KINDS = (
    Kind(
        "HARPS merged one-dimensional spectrum (air, barycentric by its pipeline manual)",
        lambda h, text: "ESO DRS BERV" in h and str(h.get("CTYPE1", "")).startswith("Angstrom"),
        "air", "barycentric", ("ESO DRS BERV",),
    ),
    Kind(
        "UVES pipeline product (air, observed wavelengths by its pipeline manual)",
        lambda h, text: h.get("INSTRUME") == "UVES"
        and str(h.get("ESO PRO REC1 PIPE ID", "")).startswith("uves"),
        "air", "topocentric", ("ESO QC VRAD BARYCOR",),
    ),
    Kind(
        "APOGEE visit spectrum (vacuum, observed wavelengths by its data model)",
        lambda h, text: re.search(r"\bAP1?D?VISIT\b", text) is not None,
        "vacuum", "topocentric", ("BC",),
    ),
    Kind(
        "CALSPEC spectrophotometric standard (vacuum by its documentation)",
        lambda h, text: str(h.get("MAPKEY", "")).strip().lower() == "calspec"
        or str(h.get("DBTABLE", "")).strip() == "CRSPECTRUM",
        "vacuum",
    ),
)


def kind_of(cards: tuple[Card, ...]) -> Kind | None:
    """The first rule that recognises these header statements."""
    header = {c.key.upper(): c.value for c in cards if c.key}
    text = "\n".join(str(c.value) for c in cards if c.key.upper() in ("HISTORY", "COMMENT"))
    return next((kind for kind in KINDS if kind.matches(header, text)), None)
