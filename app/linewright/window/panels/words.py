"""How numbers and standings are written everywhere in the window."""

from __future__ import annotations

import math

import numpy as np

GLYPHS = {
    "firm": "●",
    "likely": "◕",
    "tentative": "◑",
    "unclaimed": "○",
    "set aside": "⊗",
}


def number(value: float, digits: int, signed: bool = False) -> str:
    """A number with a true minus sign; an empty cell where it was not measured."""
    if value is None or not math.isfinite(value):
        return ""
    text = f"{value:+.{digits}f}" if signed else f"{value:.{digits}f}"
    return text.replace("-", "−")


def with_error(value: float, error: float, digits: int) -> str:
    text = number(value, digits)
    return f"{text} ± {number(error, digits)}" if text and math.isfinite(error) else text


def depth(value: float) -> str:
    """Three decimals below 10; strong emission over a weak continuum needs fewer."""
    size = abs(value) if math.isfinite(value) else 0.0
    return number(value, 3 if size < 10 else 1 if size < 1000 else 0)


def width(value: float, error: float = math.nan) -> str:
    """An equivalent width in milliangstrom: one decimal below 1000; in Å, and saying so,
    from 100 Å up."""
    if math.isfinite(value) and abs(value) >= 1e5:
        return with_error(value / 1000, error / 1000, 1 if abs(value) < 1e6 else 0) + " Å"
    return with_error(value, error, 1 if abs(value) < 1000 else 0)


def digits_for(errors) -> int:
    """Decimals that show two figures of a typical error, 2 to 4."""
    known = errors[np.isfinite(errors) & (errors > 0)]
    if not len(known):
        return 3
    return int(np.clip(np.ceil(-np.log10(np.median(known))) + 1, 2, 4))


def standing(name: str) -> str:
    return f"{GLYPHS.get(name, '?')} {name}"


def probability(value: float) -> str:
    """Two digits; never 1.00 for what is not certain."""
    if not math.isfinite(value):
        return ""
    if 0.995 <= value < 1.0:
        return "> 0.99"
    return "< 0.01" if 0.0 < value < 0.005 else f"{value:.2f}"
