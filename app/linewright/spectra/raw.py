"""What a layout delivers before anything is converted or judged."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from .units import WaveUnit


@dataclass(frozen=True, eq=False)
class RawSegment:
    """Arrays as the file has them, shape (n,) each; ``mask`` True = bad."""

    wave: np.ndarray
    flux: np.ndarray
    uncertainty: np.ndarray | None = None
    mask: np.ndarray | None = None


@dataclass(frozen=True)
class Card:
    """One statement of a file: keyword, value, comment (free text has no keyword)."""

    key: str
    value: object
    comment: str = ""


@dataclass(frozen=True, eq=False)
class Raw:
    """One spectrum as found in a file, with every statement that speaks about it.

    unit: of the wavelengths; axis_medium: what the axis type itself says, with words
    cards: header statements, the selected HDU's after the primary's
    choices: what must be passed to read the same thing again
    """

    segments: tuple[RawSegment, ...]
    unit: WaveUnit
    layout: str
    flux_unit: str = ""
    name: str = ""
    axis_medium: tuple[str, str] | None = None
    cards: tuple[Card, ...] = ()
    warnings: tuple[str, ...] = ()
    choices: dict = field(default_factory=dict)


@dataclass(frozen=True)
class Wanted:
    """The user's choices among what a file offers; None = the first sensible one."""

    hdu: int | None = None
    row: int | None = None
    columns: dict | None = None
    unit: WaveUnit | None = None
