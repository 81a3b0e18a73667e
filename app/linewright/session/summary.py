"""A session in a few lines of words."""

from __future__ import annotations

import math
from collections import Counter

from .model import STANDINGS, Session, TemperatureReading


def velocity_words(session: Session) -> str:
    """The velocity with its error and whether it may be relied on."""
    found = session.velocity
    if not math.isfinite(found.velocity):
        return "velocity not found"
    error = f" +- {found.error:.3f}" if math.isfinite(found.error) else ""
    text = f"velocity {found.velocity:+.3f}{error} km/s ({found.how})"
    if found.declared or found.how == "given":
        return text
    rivals = ", ".join(f"{velocity:+.1f}" for velocity, _ in found.rivals[:3])
    return f"{text}, not certain" + (f"; rivals {rivals}" if rivals else "")


def temperature_words(reading: TemperatureReading) -> str:
    """One temperature (or electron pressure) with its error, use and caveat."""
    kelvin = reading.unit == "K"
    digits = 0 if kelvin else 2
    error = f" +- {reading.error:.{digits}f}" if math.isfinite(reading.error) else ""
    unit = " K" if kelvin else ""
    note = f" ({reading.note})" if reading.note else ""
    return f"{reading.label} {reading.value:.{digits}f}{error}{unit}{note}"


def _temperatures(session: Session) -> list[str]:
    """The temperature in use, then how it and others were read, indented."""
    if not math.isfinite(session.temperature_k):
        return []
    first = f"excitation temperature {session.temperature_k:.0f}"
    read = session.temperatures
    if read and math.isfinite(read[0].error):
        first += f" +- {read[0].error:.0f}"
    first += " K" if not read or read[0].label == "adopted" else f" K, {read[0].label}"
    return [first, *(f"  {temperature_words(r)}" for r in read[1:])]


def summary(session: Session) -> str:
    """Features by standing, velocities, temperature and the significance cut, one a line."""
    counts = Counter(claim.standing for claim in session.claims)
    standings = ", ".join(f"{counts[s]} {s}" for s in STANDINGS if counts[s])
    lines = [f"{len(session.features)} features" + (f": {standings}" if standings else "")]
    lines.append(velocity_words(session))
    lines += _second_star(session)
    lines += _temperatures(session)
    cut, false = (session.measurement.get(k) for k in ("threshold", "expected_false"))
    if cut is not None:
        lines.append(f"significance cut {cut:.2f}: {false:.1f} false features expected")
    return "\n".join(lines)


def _second_star(session: Session) -> list[str]:
    stars = [(v, e) for origin, v, e in session.components if origin == "stellar"]
    return [f"second star at {v:+.3f} +- {e:.3f} km/s" for v, e in stars[1:]]
