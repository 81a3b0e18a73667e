"""The temperatures of a session in one line, and each with its caveat."""

from __future__ import annotations

import math

from ..claims.readings import ADOPTED
from ..session.model import Session
from ..session.summary import temperature_words


def short_text(session: Session) -> str:
    """'T 5,098 ± 99 K', or 'T 5,000 K given' (or nominal); empty where none is known."""
    if not math.isfinite(session.temperature_k):
        return ""
    text = f"T {session.temperature_k:,.0f}"
    if not session.temperatures:
        return f"{text} K"
    first = session.temperatures[0]
    if math.isfinite(first.error):
        return f"{text} ± {first.error:,.0f} K"
    return f"{text} K" if first.label == ADOPTED else f"{text} K {first.label}"


def long_text(session: Session) -> str:
    """Every temperature with its error and caveat, one a line."""
    return "\n".join(temperature_words(reading) for reading in session.temperatures)
